//! Equations, results, evidence and appendices of the invented record.

use super::plots::*;
use super::*;

pub fn equations() -> Vec<Block> {
    let d = |name: Math| row(vec![Math::Upright("d".into()), name]);
    let rate = row(vec![
        fraction(d(symbol("h")), d(symbol("t"))),
        operator("="),
        operator("−"),
        fraction(
            row(vec![symbol("Q_o"), operator("+"), symbol("Q_p")]),
            symbol("A"),
        ),
        operator(","),
        Math::Quad,
        symbol("h"),
        fenced(number("0")),
        operator("="),
        symbol("h_0"),
    ]);
    let torricelli = row(vec![
        symbol("C_d"),
        symbol("a_o"),
        root(row(vec![number("2"), symbol("g"), symbol("h")])),
    ]);
    let outflow = row(vec![
        symbol("Q_o"),
        operator("="),
        Math::Cases(vec![
            (
                torricelli.clone(),
                row(vec![symbol("h"), operator(">"), number("0")]),
            ),
            (number("0"), Math::Upright("otherwise".into())),
        ]),
    ]);
    let reynolds = row(vec![
        Math::Upright("Re".into()),
        operator("="),
        fraction(
            row(vec![
                symbol("ρ"),
                symbol("v_o"),
                root(row(vec![
                    number("4"),
                    symbol("a_o"),
                    operator("/"),
                    symbol("π"),
                ])),
            ]),
            symbol("μ_w"),
        ),
        operator(","),
        Math::Quad,
        symbol("v_o"),
        operator("="),
        symbol("C_d"),
        root(row(vec![number("2"), symbol("g"), symbol("h")])),
    ]);
    let term = |k: &str| {
        power(
            fenced(row(vec![
                fraction(
                    row(vec![operator("∂"), symbol("t_low")]),
                    row(vec![operator("∂"), symbol(k)]),
                ),
                operator("·"),
                symbol(&format!("u_{k}")),
            ])),
            number("2"),
        )
    };
    let mut sum = vec![symbol("u_t"), operator("="), symbol("u_num"), operator("+")];
    for (i, k) in ["A", "a", "h", "C", "Q", "g", "ρ", "μ"].iter().enumerate() {
        if i > 0 {
            sum.push(operator("+"));
        }
        sum.push(term(k));
    }
    let observed = row(vec![
        symbol("p"),
        operator("="),
        fraction(
            row(vec![
                Math::Upright("ln".into()),
                fenced(row(vec![
                    Math::Fenced {
                        open: '|',
                        close: '|',
                        body: Box::new(row(vec![
                            symbol("t_h"),
                            operator("−"),
                            Math::Subscript(
                                Box::new(symbol("t")),
                                Box::new(row(vec![symbol("h"), operator("/"), number("2")])),
                            ),
                        ])),
                    },
                    operator("/"),
                    Math::Fenced {
                        open: '|',
                        close: '|',
                        body: Box::new(row(vec![
                            Math::Subscript(
                                Box::new(symbol("t")),
                                Box::new(row(vec![symbol("h"), operator("/"), number("2")])),
                            ),
                            operator("−"),
                            Math::Subscript(
                                Box::new(symbol("t")),
                                Box::new(row(vec![symbol("h"), operator("/"), number("4")])),
                            ),
                        ])),
                    },
                ])),
            ]),
            row(vec![Math::Upright("ln".into()), number("2")]),
        ),
    ]);
    let equation = |anchor: &str, label: &str, math: Math, note: &str| {
        Block::Equation(Equation {
            anchor: anchor.into(),
            label: label.into(),
            math,
            note: if note.is_empty() {
                Text::new()
            } else {
                plain(note)
            },
        })
    };
    vec![
        heading(1, "4", "Equations", "equations"),
        heading(2, "4.1", "Balance of volume", "balance"),
        Block::Paragraph(vec![
            text("The volume in the tank falls by what the outlet "),
            math("Q_o"),
            text(" and the pumps "),
            math("Q_p"),
            text(" take together. With the constant area "),
            math("A"),
            text(" of the free surface this gives one differential equation for the level,"),
        ]),
        equation("level", "(1)", rate, ""),
        paragraph("in which the outflow follows the discharge law of a sharp-edged opening,"),
        equation(
            "outflow",
            "(2)",
            outflow,
            "Source: hydraulics handbook, third edition, equation 6.12. Dimension checked: m³/s on both sides.",
        ),
        paragraph(
            "The coefficient is valid for turbulent flow; the Reynolds number of the outlet is reported with the results:",
        ),
        equation("reynolds", "(3)", reynolds, ""),
        heading(2, "4.2", "Uncertainty and order", "uncertainty"),
        paragraph(
            "The contributions of the inputs are combined to first order and in quadrature with the numerical part,",
        ),
        equation("quadrature", "(4)", row(sum), ""),
        paragraph("and the order that the method shows on three grids is"),
        equation("order", "(5)", observed, ""),
    ]
}

pub fn results() -> Vec<Block> {
    let figure = |anchor: &str,
                  label: &str,
                  caption: &str,
                  alternative: &str,
                  file: &str,
                  picture: Picture| {
        Block::Figure(Figure {
            anchor: anchor.into(),
            label: label.into(),
            caption: plain(caption),
            alternative: alternative.into(),
            file: file.into(),
            picture,
        })
    };
    vec![
        heading(1, "5", "Results", "results"),
        heading(2, "5.1", "History", "history-section"),
        Block::Paragraph(vec![
            text("The level and the outflow over time are drawn in "),
            reference("Figure 1", "history"),
            text(
                ". The two panels share their time axis; the vertical lines mark the instants that the criteria ask for.",
            ),
        ]),
        figure(
            "history",
            "Figure 1",
            "Level and outflow after loss of supply for three positions of valve V-17",
            "Two panels over time from 0 to 20 minutes. The level falls from 3.25 m; with the valve open it reaches 0.45 m after 11.3 minutes.",
            "figures/history.svg",
            Picture::Plot(history()),
        ),
        figure(
            "sketch",
            "Figure 2",
            "Sketch of the tank with its outlet",
            "A tank with water up to the level h and an outlet with valve V-17 at its lower right.",
            "attachments/sketch.svg",
            Picture::Sketch(SKETCH.as_bytes().to_vec()),
        ),
    ]
}

pub fn evidence() -> Vec<Block> {
    vec![
        heading(1, "6", "Evidence", "evidence"),
        Block::Paragraph(vec![
            text("The error of the alarm time falls with the step as the order of the method demands ("),
            reference("Figure 3", "convergence"),
            text("); by "),
            reference("equation (5)", "order"),
            text(" the observed order is "),
            Inline::Math(row(vec![symbol("p"), operator("="), number("3.98"), operator("±"), number("0.03")])),
            text(", the theoretical one 4. The published step of 0.1 min leaves a numerical error of 3 × 10⁻⁸ min, five orders of magnitude below the share of the inputs."),
        ]),
        Block::Figure(Figure {
            anchor: "convergence".into(),
            label: "Figure 3".into(),
            caption: plain("Error of the alarm time against the step"),
            alternative: "Log-log plot of error against step; the points of the classical method lie on a line of slope four.".into(),
            file: "figures/convergence.svg".into(),
            picture: Picture::Plot(convergence()),
        }),
    ]
}

pub fn appendices() -> Vec<Block> {
    let step = |i: usize| {
        let t = i as f64 * 0.25;
        let h = 3.25 - 0.25 * t * (1.0 - 0.014 * t);
        let texts = [
            format!("{t:.2}"),
            format!("{h:.4}"),
            format!("{:.3}", 25.0 * (h / 3.25).max(0.0).sqrt() + 42.0),
            format!("{:.5}", 0.6 + 0.0004 * t),
            if i % 9 == 4 {
                "event: pump 2 stops on low suction pressure".into()
            } else {
                "–".to_owned()
            },
        ];
        cells(&texts.iter().map(String::as_str).collect::<Vec<_>>())
    };
    let mut listing: Vec<String> = (1..=140)
        .map(|i| {
            format!(
                "key_{i:03} = {}.{:02}   # input {i}, with a unit and a source",
                i,
                i % 100
            )
        })
        .collect();
    listing[3] = "title = \"Break tank T-201: drain-down after loss of supply, an overlong line that has to wrap more than once on paper because nobody broke it where it was written, with µ, ≤ and Ω in it\"".into();
    listing[7] = "\t[case.\"valve open\"]".into();
    listing[8] = String::new();
    vec![
        Block::PageBreak,
        heading(1, "A", "Printed history", "appendix-history"),
        Block::Table(Table {
            anchor: "printed".into(),
            label: "Table A.1".into(),
            caption: plain("History of the governing case at the reporting spacing"),
            columns: vec![
                column("Time / min", Align::Decimal),
                column("Level / m", Align::Decimal),
                column("Flow / (L/s)", Align::Decimal),
                column("Coefficient", Align::Decimal),
                column("Remark", Align::Left),
            ],
            rows: (0..90).map(step).collect(),
            note: plain("The full resolution is in the file data/history.csv of the package."),
        }),
        heading(1, "B", "Files and digests", "appendix-files"),
        Block::Table(Table {
            anchor: "files".into(),
            label: "Table B.1".into(),
            caption: plain("Files of the package"),
            columns: vec![
                column("File", Align::Left),
                column("Size / byte", Align::Right),
                column("SHA-256", Align::Left),
            ],
            rows: [
                "data/history/valve-open/full-resolution-history-of-all-quantities.csv",
                "problem.toml",
                "attachments/valve-V-17-data-sheet.pdf",
            ]
            .iter()
            .map(|file| {
                body(vec![
                    vec![Inline::Code((*file).into())],
                    plain("104\u{202f}221"),
                    vec![Inline::Code(
                        "9f2c41d70be377aa61f00e5f2c6b7d0f1a8e4c5b3d2916f7a0b1c2d3e4f50617".into(),
                    )],
                ])
            })
            .collect(),
            note: Text::new(),
        }),
        heading(1, "C", "Problem file", "appendix-problem"),
        Block::Listing(Listing {
            anchor: "problem".into(),
            caption: plain("problem.toml, as it was read"),
            lines: listing,
            numbered: true,
        }),
    ]
}
