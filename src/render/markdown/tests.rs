use super::*;
use crate::formula::typeset::Math;
use crate::record::block::*;
use crate::render::sample;

fn document(blocks: Vec<Block>) -> Document {
    Document {
        identity: sample::identity(),
        blocks,
    }
}

/// What a reader of GitHub-flavoured Markdown sees: the events of an independent parser.
fn text_of(markdown: &str) -> String {
    use pulldown_cmark::{Event, Options, Parser};
    let options = Options::ENABLE_TABLES | Options::ENABLE_MATH | Options::ENABLE_STRIKETHROUGH;
    let mut text = String::new();
    for event in Parser::new_ext(markdown, options) {
        match event {
            Event::Text(t) | Event::Code(t) => text.push_str(&t),
            Event::InlineMath(t) | Event::DisplayMath(t) => text.push_str(&format!("<math {t}>")),
            Event::Start(tag) => text.push_str(&format!(
                "<{}>",
                format!("{tag:?}")
                    .split(['(', ' '])
                    .next()
                    .unwrap_or_default()
            )),
            Event::SoftBreak | Event::HardBreak => text.push('\n'),
            _ => {}
        }
    }
    text
}

#[test]
fn prop_no_character_of_the_user_acts_as_markup() {
    let hostile = "a|b $x$ <b>c</b> *d* _e_ `f` [g](h) # i ~~j~~ \\ & k www.l.m http://n";
    let seen = text_of(&write(&document(vec![Block::Paragraph(vec![
        Inline::Text(hostile.into()),
    ])])));
    assert_eq!(seen, format!("<Paragraph>{hostile}"));
}

#[test]
fn prop_hostile_cells_keep_their_table() {
    let cells = ["a|b", "`|`", "$|x|$", "1\n2"];
    let table = Table {
        anchor: "t".into(),
        label: "Table 1".into(),
        caption: vec![Inline::Text("C | D".into())],
        columns: cells
            .iter()
            .map(|c| Column {
                heading: vec![Inline::Text((*c).into())],
                align: Align::Left,
            })
            .collect(),
        rows: vec![Row {
            cells: cells
                .iter()
                .map(|c| {
                    vec![
                        Inline::Code((*c).into()),
                        Inline::Math(Math::Fenced {
                            open: '|',
                            close: '|',
                            body: Box::new(Math::Symbol("x".into())),
                        }),
                    ]
                })
                .collect(),
            kind: RowKind::Body,
        }],
        note: Text::new(),
    };
    let seen = text_of(&write(&document(vec![Block::Table(table)])));
    assert_eq!(seen.matches("<TableCell>").count(), 8, "{seen}");
    assert_eq!(seen.matches("<math ").count(), 4, "{seen}");
}

#[test]
fn hand_lines_that_look_like_lists_stay_prose() {
    for line in [
        "- not a list",
        "1. not a list",
        "+ nor this",
        "12) nor this",
        "=== nor a heading",
    ] {
        let seen = text_of(&write(&document(vec![Block::Paragraph(vec![
            Inline::Text(line.into()),
        ])])));
        assert_eq!(seen, format!("<Paragraph>{line}"));
    }
}

#[test]
fn hand_a_listing_with_fences_in_it_stays_one_block() {
    let lines = vec!["```".to_owned(), "x".to_owned(), "````".to_owned()];
    let listing = Listing {
        anchor: "l".into(),
        caption: Text::new(),
        lines,
        numbered: false,
    };
    let markdown = write(&document(vec![
        Block::Listing(listing),
        Block::Paragraph(vec![Inline::Text("after".into())]),
    ]));
    let seen = text_of(&markdown);
    assert!(
        seen.ends_with("<CodeBlock>```\nx\n````\n<Paragraph>after"),
        "{seen}"
    );
}

#[test]
fn prop_the_sample_has_every_part() {
    let markdown = write(&sample::record());
    for part in [
        "# Calculation record",
        "## 1 Summary",
        "$$ ",
        "](figures/history.svg)",
        "☑",
        "☐",
        "| Originator |",
        "````text".trim_start_matches('`'),
        "<a id=\"inputs\"></a>",
    ] {
        assert!(markdown.contains(part), "{part}");
    }
    let seen = text_of(&markdown);
    assert_eq!(seen.matches("<Table>").count(), 7);
}
