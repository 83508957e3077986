use super::strip::Drawn;
use super::*;
use crate::record::block::*;
use crate::render::figure;
use crate::render::sample;
use crate::render::scene::Area;

fn style() -> PageStyle {
    PageStyle::builtin().expect("the page style that ships with the program")
}

fn document(blocks: Vec<Block>) -> Document {
    Document {
        identity: sample::identity(),
        blocks,
    }
}

/// Texts of a laid-out document with their places: page, area, words.
fn text_boxes(document: &Document, style: &PageStyle) -> Vec<(usize, Area, String)> {
    let faces = Faces::load().expect("faces");
    let laid = lay_out(document, style, &faces).expect("a layout");
    let mut boxes = Vec::new();
    for (number, page) in laid.pages.iter().enumerate() {
        for (top, strip) in &page.placed {
            for piece in &strip.pieces {
                for mark in &piece.marks {
                    if let Drawn::Scene { scene, x, y, scale } = mark {
                        for (area, text) in figure::text_areas(scene) {
                            let moved = |a: f32, origin: f32| origin + a * scale;
                            let (y, x) = (top + y, *x);
                            boxes.push((
                                number,
                                Area {
                                    left: moved(area.left, x),
                                    right: moved(area.right, x),
                                    top: moved(area.top, y),
                                    bottom: moved(area.bottom, y),
                                },
                                text,
                            ));
                        }
                    }
                }
                if let Some(area) = piece.text_area() {
                    boxes.push((
                        number,
                        Area {
                            top: area.top + top,
                            bottom: area.bottom + top,
                            ..area
                        },
                        piece.text(),
                    ));
                }
            }
        }
    }
    boxes
}

fn check_boxes(document: &Document, style: &PageStyle) {
    let boxes = text_boxes(document, style);
    assert!(!boxes.is_empty());
    let (right, bottom) = (style.width - style.right, style.height - style.bottom);
    for (page, area, text) in &boxes {
        let inside = area.left >= style.left - 1.0
            && area.right <= right + 1.0
            && area.top >= style.top - 4.0
            && area.bottom <= bottom + 1.0;
        assert!(
            inside,
            "page {page}: {text:?} stands outside the text block: {area:?}"
        );
    }
    for (i, (page, area, text)) in boxes.iter().enumerate() {
        for (other_page, other, other_text) in &boxes[i + 1..] {
            let apart = page != other_page || !area.grown(-0.4).overlaps(&other.grown(-0.4));
            assert!(
                apart,
                "page {page}: {text:?} {area:?} and {other_text:?} {other:?} overlap"
            );
        }
    }
}

/// For the eye: writes the samples where the variable says, and nothing without it.
#[allow(
    clippy::disallowed_methods,
    reason = "what it writes is looked at by people"
)]
#[test]
fn regress_the_samples_can_be_viewed() {
    let Ok(folder) = std::env::var("COUNTERMARCH_SAMPLES") else {
        return;
    };
    let faces = Faces::load().expect("faces");
    for (name, document) in [("record", sample::record()), ("hard", sample::hard())] {
        let file = write(&document, &style()).expect("a file");
        std::fs::write(format!("{folder}/{name}.pdf"), file).expect("written");
        let markdown = crate::render::markdown::write(&document);
        std::fs::write(format!("{folder}/{name}.md"), markdown).expect("written");
        for block in &document.blocks {
            if let Block::Figure(Figure {
                picture: Picture::Plot(plot),
                anchor,
                ..
            }) = block
            {
                let scene = figure::draw(plot, &faces, &style()).expect("a scene");
                let svg = crate::render::svg::write(&scene);
                std::fs::write(format!("{folder}/{name}-{anchor}.svg"), svg).expect("written");
            }
        }
    }
}

#[test]
fn prop_no_text_overlaps_another_or_leaves_the_text_block() {
    check_boxes(&sample::record(), &style());
    check_boxes(&sample::hard(), &style());
}

#[test]
fn prop_the_same_document_gives_the_same_bytes_also_in_parallel() {
    let document = sample::record();
    let first = write(&document, &style()).expect("a file");
    let others: Vec<Vec<u8>> = std::thread::scope(|scope| {
        let run = || scope.spawn(|| write(&document, &style()).expect("a file"));
        [run(), run()]
            .map(|handle| handle.join().expect("a thread"))
            .into()
    });
    assert!(others.iter().all(|other| *other == first));
}

fn text(words: &str) -> Text {
    sample::plain(words)
}

fn table(columns: Vec<Column>, rows: Vec<Row>) -> Block {
    Block::Table(Table {
        anchor: "t".into(),
        label: "Table 1".into(),
        caption: text("A table"),
        columns,
        rows,
        note: text("A note."),
    })
}

fn left(heading: &str) -> Column {
    Column {
        heading: text(heading),
        align: Align::Left,
    }
}

fn row(cells: &[&str]) -> Row {
    Row {
        cells: cells.iter().map(|cell| text(cell)).collect(),
        kind: RowKind::Body,
    }
}

#[test]
fn prop_hard_tables_stay_on_the_page() {
    let digest = "9f2c41d70be377aa61f00e5f2c6b7d0f1a8e4c5b3d2916f7a0b1c2d3e4f50617";
    let many: Vec<Column> = (0..14).map(|i| left(&format!("Heading {i}"))).collect();
    let wide = row(&["value with several words"; 14]);
    let long_words = row(&[digest, &digest.repeat(3), digest]);
    let endless = row(&["short", &"many words that go on and on. ".repeat(340), "x"]);
    let group = Row {
        cells: vec![text("A group")],
        kind: RowKind::Group,
    };
    let ragged = Row {
        cells: vec![text("only one")],
        kind: RowKind::Strong,
    };
    let three = || vec![left("A"), left("B"), left("C")];
    let numbers: Vec<Row> = (0..130).map(|i| row(&[&i.to_string(), "x", "y"])).collect();
    let blocks = vec![
        table(many, vec![wide.clone(), wide]),
        table(three(), vec![long_words]),
        table(three(), vec![group.clone(), endless, group, ragged]),
        table(three(), numbers),
        table(three(), Vec::new()),
        table(Vec::new(), Vec::new()),
    ];
    check_boxes(&document(blocks), &style());
}

#[test]
fn prop_empty_parts_are_no_fault() {
    let blocks = vec![
        Block::Paragraph(Text::new()),
        Block::List {
            ordered: true,
            items: Vec::new(),
        },
        Block::Facts(Vec::new()),
        Block::SignOff(Vec::new()),
        Block::Checklist(Vec::new()),
        Block::Checklist(vec![ChecklistColumn {
            title: String::new(),
            items: Vec::new(),
        }]),
        Block::Listing(Listing {
            anchor: "l".into(),
            caption: Text::new(),
            lines: Vec::new(),
            numbered: true,
        }),
        Block::Contents,
        Block::Notice(Notice {
            tone: Tone::Plain,
            title: String::new(),
            body: Vec::new(),
        }),
        Block::PageBreak,
        Block::PageBreak,
    ];
    for count in 0..=blocks.len() {
        write(&document(blocks[..count].to_vec()), &style()).expect("a file");
    }
}

#[test]
fn prop_an_overlong_equation_never_reaches_its_number() {
    let mut parts = vec![sample::symbol("y"), sample::operator("=")];
    for i in 0..60 {
        parts.push(sample::symbol(&format!("x_{i}")));
        parts.push(sample::operator("+"));
    }
    parts.push(sample::number("1"));
    let product = (0..60).map(|i| sample::symbol(&format!("k_{i}"))).collect();
    for math in [sample::row(parts), sample::row(product)] {
        let equation = Equation {
            anchor: "e".into(),
            label: "(1)".into(),
            math,
            note: Text::new(),
        };
        check_boxes(&document(vec![Block::Equation(equation)]), &style());
    }
}

#[test]
fn hand_characters_that_no_face_has_are_named() {
    let blocks = vec![
        Block::Paragraph(text("fine: αβγ ≤ − Ωμ × · ′ ½ → ∂ ∑")),
        table(vec![left("水")], vec![row(&["ק"])]),
    ];
    let fault = write(&document(blocks), &style()).expect_err("a fault");
    assert_eq!(fault, RenderError::MissingGlyphs(vec!['ק', '水']));
}

#[test]
fn hand_control_characters_are_shown_and_not_obeyed() {
    let boxes = text_boxes(
        &document(vec![Block::Paragraph(text("a\u{7}b\u{200b}c\td"))]),
        &style(),
    );
    assert_eq!(boxes[0].2, "a\\u{7}bc d");
}

#[test]
fn prop_letter_paper_works_too() {
    let source =
        include_str!("../../../templates/page.toml").replace("size = \"A4\"", "size = \"Letter\"");
    let style = PageStyle::parse(&source).expect("a style");
    assert_eq!((style.width, style.height), (612.0, 792.0));
    check_boxes(&sample::record(), &style);
}

#[test]
fn hand_page_styles_at_fault_name_their_key() {
    let source = include_str!("../../../templates/page.toml");
    let narrow = source.replace("left_mm = 25.0", "left_mm = 190.0");
    assert!(matches!(
        PageStyle::parse(&narrow),
        Err(RenderError::Style(_))
    ));
    let unknown = source.replace("accent =", "acent =");
    let message = PageStyle::parse(&unknown).expect_err("a fault").to_string();
    assert!(message.contains("acent"), "{message}");
}

/// Reads a file back with the page library's reader.
fn read_back(file: &[u8]) -> lopdf::Document {
    lopdf::Document::load_mem(file).expect("a readable file")
}

#[test]
fn prop_the_file_says_what_it_is() {
    let file = read_back(&write(&sample::record(), &style()).expect("a file"));
    assert_eq!(file.version, "1.7");
    let catalog = file.catalog().expect("catalog");
    for key in [
        "Lang",
        "MarkInfo",
        "StructTreeRoot",
        "Metadata",
        "Outlines",
        "PageLabels",
        "OutputIntents",
    ] {
        assert!(catalog.has(key.as_bytes()), "{key}");
    }
    let identifier = file
        .trailer
        .get(b"ID")
        .and_then(|id| id.as_array())
        .expect("identifier");
    assert_eq!(identifier[0], identifier[1]);
    let metadata = catalog
        .get(b"Metadata")
        .and_then(|m| m.as_reference())
        .expect("metadata");
    let packet = file
        .get_object(metadata)
        .and_then(|m| m.as_stream())
        .expect("a stream");
    let packet = String::from_utf8_lossy(&packet.content);
    assert!(packet.contains("<xmp:CreateDate>2026-03-14T00:00:00Z</xmp:CreateDate>"));
}

#[test]
fn prop_every_reference_is_a_link_and_every_link_leads_to_a_page() {
    let sample = sample::record();
    let file = read_back(&write(&sample, &style()).expect("a file"));
    let pages: std::collections::BTreeSet<_> = file.page_iter().collect();
    let mut count = 0;
    for object in file.objects.values() {
        let Ok(annotation) = object.as_dict() else {
            continue;
        };
        if annotation.get(b"Subtype").and_then(|s| s.as_name()).ok() != Some(b"Link") {
            continue;
        }
        count += 1;
        let target = annotation
            .get(b"Dest")
            .and_then(|d| d.as_array())
            .expect("a destination");
        assert!(pages.contains(&target[0].as_reference().expect("a page")));
        assert!(annotation.has(b"StructParent") && annotation.has(b"Contents"));
    }
    let references = |text: &Text| {
        text.iter()
            .filter(|piece| matches!(piece, Inline::Reference { .. }))
            .count()
    };
    let wanted: usize = sample
        .blocks
        .iter()
        .map(|block| match block {
            Block::Paragraph(text) => references(text),
            Block::Notice(notice) => notice.body.iter().map(references).sum(),
            Block::Contents => {
                2 * sample
                    .blocks
                    .iter()
                    .filter(|b| matches!(b, Block::Heading(h) if h.level <= 2))
                    .count()
            }
            _ => 0,
        })
        .sum();
    // A reference that breaks over a line is a link for each line; an entry of the contents has two pieces or three.
    assert!(count >= wanted, "{count} links for {wanted} references");
}

#[test]
fn prop_tables_figures_and_formulas_are_tagged() {
    let file = read_back(&write(&sample::record(), &style()).expect("a file"));
    let mut roles = std::collections::BTreeMap::<String, usize>::new();
    for object in file.objects.values() {
        let Ok(element) = object.as_dict() else {
            continue;
        };
        if element.get(b"Type").and_then(|t| t.as_name()).ok() != Some(b"StructElem") {
            continue;
        }
        let role = element.get(b"S").and_then(|s| s.as_name()).expect("a role");
        let role = String::from_utf8_lossy(role).into_owned();
        if role == "Figure" || role == "Formula" {
            assert!(element.has(b"Alt"), "{role} without words");
        }
        *roles.entry(role).or_default() += 1;
    }
    for role in [
        "Document", "H1", "H2", "P", "Table", "TR", "TH", "TD", "Caption", "Figure", "Formula",
        "L", "LI", "LBody", "Link", "TOC", "TOCI", "Code",
    ] {
        assert!(roles.contains_key(role), "{role} in {roles:?}");
    }
    assert_eq!(roles["Figure"], 3);
}

#[test]
fn prop_no_heading_stands_alone_at_the_foot_of_a_page() {
    let faces = Faces::load().expect("faces");
    let style = style();
    for filler in 0..48 {
        let mut blocks = vec![Block::Paragraph(text("word")); filler];
        blocks.push(Block::Heading(Heading {
            level: 2,
            number: "1".into(),
            text: "Heading".into(),
            anchor: "h".into(),
        }));
        blocks.push(Block::Paragraph(text(
            &"several words make a paragraph of some lines. ".repeat(8),
        )));
        let laid = lay_out(&document(blocks), &style, &faces).expect("a layout");
        for page in &laid.pages {
            let last = page.placed.last().expect("a strip");
            assert!(last.1.outline.is_none(), "{filler} paragraphs above");
        }
    }
}

#[test]
fn prop_a_long_record_has_all_its_rows() {
    let mut blocks = Vec::new();
    for i in 0..60 {
        blocks.push(Block::Paragraph(text(
            &"Some words about the figure below. ".repeat(10),
        )));
        blocks.push(Block::Figure(Figure {
            anchor: format!("f{i}"),
            label: format!("Figure {i}"),
            caption: text("A history"),
            alternative: "A history".into(),
            file: format!("figures/{i}.svg"),
            picture: Picture::Plot(sample::history()),
        }));
    }
    let rows = (0..5000).map(|i| row(&[&format!("{i}.25"), &format!("{}", i * i), "remark"]));
    let columns = ["Time", "Value", "Remark"].map(left).to_vec();
    blocks.push(table(columns, rows.collect()));
    let document = document(blocks);
    let file = write(&document, &style()).expect("a file");
    let pages = read_back(&file).page_iter().count();
    assert!(pages > 100, "{pages}");
}

#[test]
fn prop_figures_as_files_are_readable_and_the_same_each_time() {
    let faces = Faces::load().expect("faces");
    let style = style();
    for document in [sample::record(), sample::hard()] {
        for block in &document.blocks {
            let Block::Figure(Figure {
                picture: Picture::Plot(plot),
                ..
            }) = block
            else {
                continue;
            };
            let draw =
                || crate::render::svg::write(&figure::draw(plot, &faces, &style).expect("a scene"));
            let svg = draw();
            assert_eq!(svg, draw());
            assert!(matches!(
                crate::render::sketch::read(svg.as_bytes()),
                Ok(crate::render::sketch::Artwork::Vector(_))
            ));
        }
    }
}

#[test]
fn hand_plots_that_span_nothing_are_refused() {
    let faces = Faces::load().expect("faces");
    let plot = sample::history();
    let mut empty = plot.clone();
    empty.panels.clear();
    let mut flat = plot.clone();
    flat.x.high = flat.x.low;
    let mut negative = plot.clone();
    negative.panels[0].y.scale = Scale::Logarithmic;
    let mut endless = plot.clone();
    endless.panels[1].y.high = f64::INFINITY;
    let faults: Vec<_> = [empty, flat, negative, endless]
        .iter()
        .map(|plot| figure::draw(plot, &faces, &style()).err())
        .collect();
    use crate::render::PlotFault::{NoPanel, Range};
    assert_eq!(
        faults,
        vec![Some(NoPanel), Some(Range), Some(Range), Some(Range)]
    );
    let mut broken = plot;
    broken.panels[0].series[0].points = vec![
        (f64::NAN, 1.0),
        (1.0, f64::INFINITY),
        (2.0, -5.0),
        (3.0, 1.0),
    ];
    figure::draw(&broken, &faces, &style()).expect("points that are not finite leave a gap");
}
#[test]
fn hand_a_long_narrow_table_folds_and_keeps_the_order_of_its_rows() {
    let rows: Vec<Row> = (0..31).map(|i| row(&[&format!("{i}.5"), "x"])).collect();
    let columns = vec![left("Time"), left("Word")];
    let file = read_back(&write(&document(vec![table(columns, rows)]), &style()).expect("a file"));
    let of_role = |role: &[u8]| -> Vec<&lopdf::Dictionary> {
        let elements = file
            .objects
            .values()
            .filter_map(|object| object.as_dict().ok());
        elements
            .filter(|element| element.get(b"S").and_then(|s| s.as_name()).ok() == Some(role))
            .collect()
    };
    assert_eq!(of_role(b"Table").len(), 1);
    let kids = of_role(b"Table")[0]
        .get(b"K")
        .and_then(|kids| kids.as_array())
        .expect("kids");
    // Caption, head and rows; object numbers of rows grow with the rows.
    let numbers: Vec<u32> = kids
        .iter()
        .map(|kid| kid.as_reference().expect("an element").0)
        .collect();
    assert_eq!(numbers.len(), 1 + 1 + 31);
    assert!(
        numbers[2..].windows(2).all(|pair| pair[0] < pair[1]),
        "{numbers:?}"
    );
    let faces = Faces::load().expect("faces");
    let rows: Vec<Row> = (0..31).map(|i| row(&[&format!("{i}.5"), "x"])).collect();
    let laid = lay_out(
        &document(vec![table(vec![left("Time"), left("Word")], rows)]),
        &style(),
        &faces,
    )
    .expect("a layout");
    let heights: f32 = laid.pages[0]
        .placed
        .iter()
        .map(|(_, strip)| strip.height)
        .sum();
    assert!(heights < 16.0 * 14.0 + 60.0, "{heights}");
}
