//! A document of everything that is hard to set: crowds, lengths, strangers.

use super::plots::{decades, label, ticks, words};
use super::*;

/// Blocks that strain every limit of the layout, each still legible.
pub fn hard() -> Document {
    let blocks = [figures(), tables(), texts()].concat();
    Document {
        identity: Identity {
            title: "A title that is much too long for the running head of a page and has to be cut short somewhere, with an ellipsis".into(),
            standing: "issued".into(),
            ..identity()
        },
        blocks,
    }
}

fn figure(anchor: &str, picture: Picture) -> Block {
    Block::Figure(Figure {
        anchor: anchor.into(),
        label: format!("Figure {anchor}"),
        caption: plain(
            "A caption that says at some length what is to be seen in the figure above it, so that it has to be broken into two lines and shows its hanging indent",
        ),
        alternative: "a hard case".into(),
        file: format!("figures/{anchor}.svg"),
        picture,
    })
}

/// Points of a zigzag from 0 to 10 around a level.
fn zigzag(level: f64, swing: f64, count: u32) -> Vec<(f64, f64)> {
    (0..=count)
        .map(|i| {
            let sign = if i % 2 == 0 { 1.0 } else { -1.0 };
            (10.0 * f64::from(i) / f64::from(count), level + sign * swing)
        })
        .collect()
}

fn time() -> Axis {
    Axis {
        title: label(&[
            ("Time ", false, Shift::Base),
            ("t", true, Shift::Base),
            (" / s", false, Shift::Base),
        ]),
        scale: Scale::Linear,
        low: 0.0,
        high: 10.0,
        ticks: ticks(
            &(0..=40).map(|i| f64::from(i) * 0.25).collect::<Vec<_>>(),
            2,
        ),
        minor: Vec::new(),
    }
}

fn unit(title: &str, decimals: usize) -> Axis {
    Axis {
        title: words(title),
        scale: Scale::Linear,
        low: -1.0,
        high: 1.0,
        ticks: ticks(&[-1.0, -0.5, 0.0, 0.5, 1.0], decimals),
        minor: Vec::new(),
    }
}

fn series(name: &str, points: Vec<(f64, f64)>, style: usize) -> Series {
    Series {
        label: words(name),
        points,
        style,
        line: true,
        markers: style == 4,
    }
}

fn figures() -> Vec<Block> {
    let crowd = Plot {
        x: time(),
        panels: vec![Panel {
            y: unit("Displacement / mm", 1),
            series: (0..8)
                .map(|i| {
                    series(
                        &format!("case {i}, upper bound of the input"),
                        zigzag(i as f64 * 0.2 - 0.7, 0.25, 60),
                        i,
                    )
                })
                .collect(),
            levels: vec![
                Mark {
                    at: 0.8,
                    label: words("limit of clause 3.2"),
                },
                Mark {
                    at: 0.75,
                    label: words("alarm"),
                },
                Mark {
                    at: -0.8,
                    label: words("lower limit"),
                },
            ],
            instants: [1.0, 1.1, 1.2, 1.3, 5.0, 5.2, 9.8, 9.9]
                .iter()
                .map(|at| Mark {
                    at: *at,
                    label: words(&format!("event at {at:.1} s")),
                })
                .collect(),
        }],
    };
    let quiet = |i: usize| Panel {
        y: unit("A rather long title of an ordinate / (kg m/s)", 5),
        series: vec![
            series("", zigzag(0.0, 1.5, 12), i),
            series("kept inside", zigzag(0.3, 0.05, 2), i + 1),
        ],
        levels: Vec::new(),
        instants: Vec::new(),
    };
    let stacked = Plot {
        x: time(),
        panels: (0..4).map(quiet).collect(),
    };
    let (x_ticks, minor) = decades(-3, 3, 1);
    let scatter = Plot {
        x: Axis {
            title: label(&[
                ("Reynolds number ", false, Shift::Base),
                ("Re", true, Shift::Base),
            ]),
            scale: Scale::Logarithmic,
            low: 1e-3,
            high: 1e3,
            ticks: x_ticks,
            minor,
        },
        panels: vec![Panel {
            y: unit("Residual", 1),
            series: (0..6)
                .map(|k| Series {
                    label: words(&format!("set {k}")),
                    points: (0..7)
                        .map(|i| {
                            (
                                [1e-3, 1e-2, 0.1, 1.0, 10.0, 100.0, 1e3][i],
                                f64::from((i * 5 + k * 3) as u32 % 9) * 0.2 - 0.8,
                            )
                        })
                        .collect(),
                    style: k,
                    line: false,
                    markers: true,
                })
                .collect(),
            levels: Vec::new(),
            instants: Vec::new(),
        }],
    };
    vec![
        heading(1, "1", "Figures", "figures"),
        paragraph("A paragraph before the figures."),
        figure("crowd", Picture::Plot(crowd)),
        figure("stacked", Picture::Plot(stacked)),
        paragraph(&"Text that may fill the page while the figure waits. ".repeat(12)),
        figure("scatter", Picture::Plot(scatter)),
        figure("pixels", Picture::Sketch(pixels())),
        figure("photograph", Picture::Sketch(photograph())),
    ]
}

/// A grey wedge of 16 by 8 pixels as a JPEG file.
fn photograph() -> Vec<u8> {
    const DIGITS: &str = "ffd8ffe000104a46494600010101006000600000ffdb0043001b12141714111b1716171e1c1b2028422b28252528513a3d30\
        42605565645f555d5b6a7899816a7190735b5d85b586909ea3abadab6780bcc9baa6c799a8aba4ffc2000b08000800100101\
        1100ffc4001500010100000000000000000000000000000405ffda0008010100000001253fffc40015100101000000000000\
        00000000000000000003ffda00080101000105029a6fffc40014100100000000000000000000000000000010ffda00080101\
        00063f023fffc40014100100000000000000000000000000000010ffda0008010100013f210fffda0008010100000010ff00\
        ffc4001510010100000000000000000000000000000041ffda0008010100013f10843fffd9";
    let byte = |at: usize| u8::from_str_radix(&DIGITS[at..at + 2], 16).expect("two digits");
    (0..DIGITS.len()).step_by(2).map(byte).collect()
}

/// A small picture in two colours with a transparent corner.
fn pixels() -> Vec<u8> {
    let (width, height) = (96_u32, 48_u32);
    let pixel = |i: u32| {
        let (x, y) = (i % width, i / width);
        if x < 16 && y < 16 {
            [0, 0, 0, 0]
        } else if (x / 8 + y / 8) % 2 == 0 {
            [15, 76, 129, 255]
        } else {
            [230, 230, 235, 255]
        }
    };
    let data: Vec<u8> = (0..width * height).flat_map(pixel).collect();
    let mut file = Vec::new();
    let mut encoder = png::Encoder::new(&mut file, width, height);
    encoder.set_color(png::ColorType::Rgba);
    encoder.set_depth(png::BitDepth::Eight);
    let mut writer = encoder.write_header().expect("a header");
    writer.write_image_data(&data).expect("pixels");
    writer.finish().expect("an end");
    file
}

fn table(label: &str, columns: Vec<Column>, rows: Vec<Row>) -> Block {
    Block::Table(Table {
        anchor: label.into(),
        label: label.into(),
        caption: plain("A table that is hard to set"),
        columns,
        rows,
        note: plain("A note below the table."),
    })
}

fn tables() -> Vec<Block> {
    let digest = "9f2c41d70be377aa61f00e5f2c6b7d0f1a8e4c5b3d2916f7a0b1c2d3e4f50617";
    let group = |name: &str| Row {
        cells: vec![plain(name)],
        kind: RowKind::Group,
    };
    let many = (0..14)
        .map(|i| {
            column(
                &format!("Heading {i}"),
                if i % 3 == 1 {
                    Align::Decimal
                } else {
                    Align::Left
                },
            )
        })
        .collect();
    let wide = |i: usize| {
        body(
            (0..14)
                .map(|k| {
                    plain(&if k % 3 == 1 {
                        format!("{}.{k:03}", i * 37 % 100)
                    } else {
                        format!("value {k} of several words")
                    })
                })
                .collect(),
        )
    };
    let formula = |k: &str| {
        let parts = vec![
            symbol("y_k"),
            operator("="),
            fraction(
                symbol(k),
                root(row(vec![symbol("x"), operator("+"), number("1")])),
            ),
            operator("≤"),
            number("12.5"),
            Math::Upright("m".into()),
        ];
        body(vec![
            plain("A formula in a cell"),
            vec![Inline::Math(row(parts))],
            plain("and words beside it that are long enough to break"),
        ])
    };
    let three = |align| {
        vec![
            column("First", Align::Left),
            column("Second", align),
            column("Third", Align::Left),
        ]
    };
    let mut grouped = Vec::new();
    for g in 0..4 {
        grouped.push(group(&format!("Case {g}: a group of rows")));
        grouped.extend((0..14).map(|i| {
            cells(&[
                &format!("quantity {i}"),
                &format!("{}.{}", i * 7, "1234567".get(..i % 6 + 1).unwrap_or("1")),
                "remark",
            ])
        }));
    }
    vec![
        heading(1, "2", "Tables", "tables"),
        table("Table 1", many, vec![wide(1), wide(2), wide(3)]),
        table(
            "Table 2",
            three(Align::Left),
            vec![
                cells(&[digest, &digest.repeat(2), "x"]),
                body(vec![
                    vec![Inline::Code(digest.into())],
                    vec![Inline::Code(
                        "data/a/very/long/path/to/some/file_with_a_long_name-and-more.csv".into(),
                    )],
                    plain("y"),
                ]),
            ],
        ),
        table(
            "Table 3",
            three(Align::Left),
            vec![formula("a"), formula("β")],
        ),
        table("Table 4", three(Align::Decimal), grouped),
        table(
            "Table 5",
            vec![
                column("Number", Align::Decimal),
                column("Word", Align::Centre),
            ],
            vec![
                cells(&["1.5", "one"]),
                cells(&["−12 345.75", "two"]),
                cells(&["–", "three"]),
            ],
        ),
        table(
            "Table 6",
            three(Align::Left),
            vec![cells(&[
                "endless",
                &"a cell that goes on and on ".repeat(370),
                "end",
            ])],
        ),
    ]
}

fn texts() -> Vec<Block> {
    let inline = row(vec![
        symbol("Q_o"),
        operator("="),
        symbol("C_d"),
        symbol("a_o"),
        root(row(vec![number("2"), symbol("g"), symbol("h")])),
        operator("≈"),
        number("0.043"),
        Math::Upright("m³/s".into()),
        operator("<"),
        symbol("Q_p"),
    ]);
    let sum = {
        let mut parts = vec![symbol("y"), operator("=")];
        for i in 0..40 {
            parts.extend([
                symbol(&format!("k_{i}")),
                symbol(&format!("x_{i}")),
                operator("+"),
            ]);
        }
        parts.push(number("1"));
        row(parts)
    };
    let equation = |label: &str, math: Math| {
        Block::Equation(Equation {
            anchor: label.into(),
            label: label.into(),
            math,
            note: Text::new(),
        })
    };
    vec![
        heading(1, "3", "Texts", "texts"),
        heading(2, "3.1", "A heading that is so long that it cannot possibly stand on one line of a page of this width, whatever one does", "long"),
        heading(3, "3.1.1", "A third level", "third"),
        Block::Paragraph(vec![
            Inline::Text("A long formula in a line of text, ".into()),
            Inline::Math(inline.clone()),
            Inline::Text(", may break after its relations, and so may ".into()),
            Inline::Math(inline),
            Inline::Text("; a digest ".into()),
            Inline::Code("sha256:9f2c41d70be377aa61f00e5f2c6b7d0f1a8e4c5b3d2916f7a0b1c2d3e4f50617".into()),
            Inline::Text(" breaks between its groups. Marks of the user: | $ < > & * _ ` \u{7} \" # ~ ^ {} \\ and Ελληνικά, Кириллица, ½ ≤ ≥ ± × · − ∞ ∂ ∑ √ → ° µ Ω.".into()),
        ]),
        equation("(1)", sum),
        equation("(2)", row((0..60).map(|i| symbol(&format!("k_{i}"))).collect())),
        equation("(3)", Math::Root { radicand: Box::new(fraction(symbol("α"), fraction(number("1"), fenced(fraction(symbol("x"), symbol("y")))))), degree: Some(Box::new(number("3"))) }),
        Block::Notice(Notice { tone: Tone::Good, title: "Supported".into(), body: vec![plain(&"A notice of many lines goes over the page like any text. ".repeat(70))] }),
        Block::Listing(Listing { anchor: "l".into(), caption: Text::new(), lines: vec!["x".repeat(400), String::new(), "\tαβγ → 水".replace('水', "w")], numbered: false }),
    ]
}
