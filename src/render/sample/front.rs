//! Cover, summary, basis and inputs of the invented record.

use super::*;

pub fn cover() -> Vec<Block> {
    let id = identity();
    let signatory = |role: &str, name: &str, capacity: &str, meaning: &str| Signatory {
        role: role.into(),
        name: name.into(),
        capacity: capacity.into(),
        date: "2026-03-14".into(),
        meaning: meaning.into(),
    };
    vec![
        Block::Title(Title {
            kind: "Calculation record".into(),
            number: id.number.clone(),
            title: id.title.clone(),
            project: id.project.clone(),
            issuer: id.issuer.clone(),
            revision: id.revision.clone(),
            date: id.date.clone(),
            standing: id.standing.clone(),
        }),
        Block::Facts(vec![
            (plain("Client"), plain("Harrow Valley Water")),
            (
                plain("Asset"),
                plain("Break tank T-201 with outlet valve V-17 and low-level switch LSL-203"),
            ),
            (
                plain("Supersedes"),
                plain("PS7-C-0412 revision A of 2026-01-20"),
            ),
            (plain("Retention"), plain("Life of the asset and ten years")),
            (
                plain("Content fingerprint"),
                vec![Inline::Code(id.fingerprint.clone())],
            ),
        ]),
        Block::Notice(Notice {
            tone: Tone::Bad,
            title: "Not supported in full: one of three criteria is not met".into(),
            body: vec![vec![
                text("The tank holds the low-level alarm for "),
                Inline::Strong("11.3 min".into()),
                text(
                    " after loss of supply, where the operating rule asks for at least 12 min; see ",
                ),
                reference("Table 1", "criteria"),
                text("."),
            ]],
        }),
        Block::Notice(Notice {
            tone: Tone::Caution,
            title: "Holds".into(),
            body: vec![
                plain(
                    "H1  The discharge coefficient of valve V-17 is from a catalogue; the test certificate is awaited.",
                ),
                plain(
                    "H2  The survey level of the outlet sill (assumption A3) is to be confirmed on site.",
                ),
            ],
        }),
        Block::SignOff(vec![
            signatory(
                "Originator",
                "M. Okafor",
                "Process engineer, CEng",
                "Prepared the problem definition and stands for its inputs and assumptions",
            ),
            signatory(
                "Checker",
                "L. Hartmann",
                "Principal engineer",
                "Checked inputs, model and criteria against their sources",
            ),
            signatory(
                "Approver",
                "none stated",
                "",
                "Releases the calculation for use",
            ),
        ]),
        Block::PageBreak,
    ]
}

pub fn contents() -> Vec<Block> {
    vec![Block::Contents, Block::PageBreak]
}

pub fn summary() -> Vec<Block> {
    let ticked = |t: &str| (true, plain(t));
    let open = |t: &str| (false, plain(t));
    vec![
        heading(1, "1", "Summary for the checker", "summary"),
        heading(2, "1.1", "Purpose and conclusion", "purpose"),
        Block::Paragraph(vec![
            text(
                "The tank must feed the pumps for twelve minutes after the supply main fails. The level ",
            ),
            math("h"),
            text(
                " was followed from the normal operating level to the low-level switch for three cases of valve position. With the valve fully open the level reaches the alarm after 11.3 min, ",
            ),
            Inline::Emphasis("seven tenths of a minute too early".into()),
            text("; the two throttled cases meet the rule. The outflow is given by "),
            reference("equation (2)", "outflow"),
            text(" with "),
            Inline::Math(row(vec![symbol("C_d"), operator("="), number("0.61")])),
            text("; the history is shown in "),
            reference("Figure 1", "history"),
            text("."),
        ]),
        Block::Table(Table {
            anchor: "criteria".into(),
            label: "Table 1".into(),
            caption: plain(
                "Criteria, results and findings; the governing case is set in strong type",
            ),
            columns: vec![
                column("Criterion", Align::Left),
                column("Case", Align::Left),
                column("Value", Align::Decimal),
                column("± Uncertainty", Align::Decimal),
                column("Limit", Align::Decimal),
                column("Unit", Align::Left),
                column("Margin", Align::Decimal),
                column("Finding", Align::Left),
            ],
            rows: vec![
                Row {
                    kind: RowKind::Strong,
                    ..cells(&[
                        "Time to low-level alarm",
                        "valve open",
                        "11.3",
                        "0.2",
                        "≥ 12",
                        "min",
                        "−0.7",
                        "not met",
                    ])
                },
                cells(&[
                    "Time to low-level alarm",
                    "two thirds",
                    "16.92",
                    "0.25",
                    "≥ 12",
                    "min",
                    "4.9",
                    "met",
                ]),
                cells(&[
                    "Time to low-level alarm",
                    "one third",
                    "33.8",
                    "0.5",
                    "≥ 12",
                    "min",
                    "21.8",
                    "met",
                ]),
                cells(&[
                    "Lowest level at the sill",
                    "valve open",
                    "0.412",
                    "0.009",
                    "≥ 0.35",
                    "m",
                    "0.062",
                    "met",
                ]),
                cells(&[
                    "Velocity in the outlet",
                    "valve open",
                    "2.87",
                    "0.04",
                    "≤ 3",
                    "m/s",
                    "0.13",
                    "met",
                ]),
            ],
            note: plain(
                "Uncertainty: expanded, coverage factor 2, from inputs and numerical error together. Basis of the limits: operating rule OR-14, clauses 3.2 and 3.5.",
            ),
        }),
        Block::Checklist(vec![
            ChecklistColumn {
                title: "Checked by the program".into(),
                items: vec![
                    ticked("Units and dimensions of every formula and input"),
                    ticked("Observed order of the method agrees with its theoretical order"),
                    ticked("Step of the published result hits the alarm instant"),
                    ticked(
                        "Alternate calculation with a second method agrees within the stated band",
                    ),
                    ticked("Volume balance closes to 2.1 × 10⁻⁹ of the tank's content"),
                ],
            },
            ChecklistColumn {
                title: "Left to the checker".into(),
                items: vec![
                    open("Each formula against its source, edition and clause"),
                    open("Each input against its source"),
                    open("Adequacy of the model: no swirl at the outlet, valve position constant"),
                    open("Assumptions A1 to A5 and their bearing on the finding"),
                ],
            },
        ]),
    ]
}

pub fn basis() -> Vec<Block> {
    vec![
        heading(1, "2", "Basis and limits", "basis"),
        paragraph(
            "The tank has vertical walls, so that the free surface keeps its area between the normal operating level and the sill of the outlet. The outlet is short compared with its diameter and discharges freely; a quasi-steady discharge law therefore describes the flow, and the inertia of the water in the outlet may be neglected against the time scale of the drain-down, which is longer by three orders of magnitude.",
        ),
        Block::Notice(Notice {
            tone: Tone::Plain,
            title: "Standing of the evidence".into(),
            body: vec![plain(
                "Numerical evidence shows that the equations were solved right, not that they are the right equations. The adequacy of the model, of codes and of local rules is for a competent and, where required, licensed engineer.",
            )],
        }),
        heading(2, "2.1", "Assumptions", "assumptions"),
        Block::List {
            ordered: true,
            items: vec![
                plain(
                    "The supply fails at once and does not return within the period of the calculation.",
                ),
                vec![
                    text("The pumps draw a constant flow "),
                    math("Q_p"),
                    text(" until the low-level switch stops them; the switch acts at "),
                    math("h_low"),
                    text(" without delay."),
                ],
                plain(
                    "The sill stands at 101.35 m above datum (drawing PS7-D-118, revision 4); open, see hold H2.",
                ),
                vec![
                    text("The discharge coefficient "),
                    math("C_d"),
                    text(
                        " does not depend on the level; its catalogue spread of ±4 % covers the range of Reynolds numbers.",
                    ),
                ],
            ],
        },
    ]
}

pub fn inputs() -> Vec<Block> {
    let input =
        |symbol: &str, meaning: &str, value: &str, unit: &str, spread: &str, source: &str| {
            body(vec![
                vec![math(symbol)],
                plain(meaning),
                plain(value),
                plain(unit),
                plain(spread),
                plain(source),
            ])
        };
    let group = |name: &str| Row {
        cells: vec![plain(name)],
        kind: RowKind::Group,
    };
    vec![
        heading(1, "3", "Inputs", "inputs-section"),
        Block::Table(Table {
            anchor: "inputs".into(),
            label: "Table 2".into(),
            caption: plain("Inputs with spread and source"),
            columns: vec![
                column("Symbol", Align::Left),
                column("Meaning", Align::Left),
                column("Value", Align::Decimal),
                column("Unit", Align::Left),
                column("Spread", Align::Decimal),
                column("Source", Align::Left),
            ],
            rows: vec![
                group("Geometry"),
                input(
                    "A",
                    "Area of the free surface",
                    "48.6",
                    "m²",
                    "± 0.2",
                    "Survey 2025-11, sheet 3",
                ),
                input(
                    "a_o",
                    "Area of the outlet, valve fully open",
                    "0.031\u{202f}42",
                    "m²",
                    "± 0.000\u{202f}15",
                    "Valve V-17 data sheet, rev. 2",
                ),
                input(
                    "h_0",
                    "Normal operating level above the sill",
                    "3.25",
                    "m",
                    "± 0.02",
                    "Operating rule OR-14, clause 3.2",
                ),
                input(
                    "h_low",
                    "Level of the low-level switch",
                    "0.45",
                    "m",
                    "± 0.01",
                    "Loop sheet LSL-203",
                ),
                group("Hydraulics"),
                input(
                    "C_d",
                    "Discharge coefficient",
                    "0.61",
                    "–",
                    "± 0.024",
                    "Catalogue value, assumption A4; test certificate awaited (hold H1)",
                ),
                input(
                    "g",
                    "Acceleration of free fall",
                    "9.81",
                    "m/s²",
                    "–",
                    "Rounded from ISO 80000-3",
                ),
                input(
                    "Q_p",
                    "Flow drawn by the pumps",
                    "0.042",
                    "m³/s",
                    "± 0.001",
                    "Pump curve PC-88, two pumps in parallel at 31 m",
                ),
                input(
                    "ρ",
                    "Density of water at 12 °C",
                    "999.5",
                    "kg/m³",
                    "± 0.2",
                    "Handbook table, see references",
                ),
                input(
                    "μ_w",
                    "Viscosity of water at 12 °C",
                    "1.234 × 10⁻³",
                    "Pa·s",
                    "2 %",
                    "Handbook table, see references",
                ),
            ],
            note: Text::new(),
        }),
    ]
}
