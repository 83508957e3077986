//! The document's building blocks: everything that a page says, as data.
//!
//! Owns: the types that both writers (Markdown, PDF) consume. Numbers arrive here as text: they were
//! rounded and spelled by `record`, and a writer can neither recompute nor reformat one.

use crate::formula::typeset::Math;

/// A whole document in reading order, numbered and resolved: the writers add pages and marks, nothing else.
#[derive(Clone, Debug, PartialEq)]
pub struct Document {
    pub identity: Identity,
    pub blocks: Vec<Block>,
}

/// What stands on every page and in the file's metadata.
#[derive(Clone, Debug, PartialEq)]
pub struct Identity {
    pub number: String,
    pub revision: String,
    pub title: String,
    pub project: String,
    pub issuer: String,
    /// Author in the metadata: the originator.
    pub author: String,
    /// ISO 8601 calendar date, from the problem file.
    pub date: String,
    /// "preliminary", "for check" or "issued": the first of them is a watermark on every page.
    pub standing: String,
    /// Full content fingerprint, `sha256:` and 64 hexadecimal digits.
    pub fingerprint: String,
    /// Program name and version.
    pub program: String,
}

/// Running text in pieces.
pub type Text = Vec<Inline>;

#[derive(Clone, Debug, PartialEq)]
pub enum Inline {
    Text(String),
    Emphasis(String),
    Strong(String),
    /// Names of files, symbols of the problem file, digests: set in the mono face, may break anywhere if long.
    Code(String),
    Math(Math),
    /// A working cross-reference, e.g. text "Table 3" to anchor "inputs".
    Reference {
        text: String,
        anchor: String,
    },
    /// A forced line break inside a paragraph or cell.
    Break,
}

#[derive(Clone, Debug, PartialEq)]
pub enum Block {
    Heading(Heading),
    Paragraph(Text),
    List {
        ordered: bool,
        items: Vec<Text>,
    },
    Table(Table),
    Figure(Figure),
    Equation(Equation),
    Listing(Listing),
    /// The cover's head: document kind, number, title, project and so on.
    Title(Title),
    /// Label and value in two columns without rules or number (cover, program identity).
    Facts(Vec<(Text, Text)>),
    /// A box that must not be overlooked: finding, holds, cautions.
    Notice(Notice),
    SignOff(Vec<Signatory>),
    /// Two columns of boxes: what the program checked, what is left to the checker.
    Checklist(Vec<ChecklistColumn>),
    /// Table of contents; the writers fill it from the headings (levels 1 and 2).
    Contents,
    PageBreak,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Heading {
    /// 1 to 3.
    pub level: u8,
    /// "4.2", "A.1", or empty for an unnumbered heading.
    pub number: String,
    pub text: String,
    pub anchor: String,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Table {
    pub anchor: String,
    /// "Table 3"; empty for a table without caption.
    pub label: String,
    pub caption: Text,
    pub columns: Vec<Column>,
    pub rows: Vec<Row>,
    /// Small print below the table; empty without.
    pub note: Text,
}

impl Table {
    /// A table with heads in plain words; the composer gives it its number.
    pub fn of(
        anchor: &str,
        caption: &str,
        columns: &[(&str, Align)],
        rows: Vec<Row>,
        note: Text,
    ) -> Table {
        let plain = |words: &str| vec![Inline::Text(words.to_owned())];
        Table {
            anchor: anchor.to_owned(),
            label: String::new(),
            caption: plain(caption),
            columns: columns
                .iter()
                .map(|(name, align)| Column {
                    heading: plain(name),
                    align: *align,
                })
                .collect(),
            rows,
            note,
        }
    }
}

#[derive(Clone, Debug, PartialEq)]
pub struct Column {
    pub heading: Text,
    pub align: Align,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Align {
    Left,
    Centre,
    Right,
    /// Numbers aligned on the decimal point, tabular figures; a cell that is not a number is centred on its column.
    Decimal,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    pub cells: Vec<Text>,
    pub kind: RowKind,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum RowKind {
    Body,
    /// One cell that spans the table and heads the rows below it (a case, a group).
    Group,
    /// Emphasised, e.g. the governing case.
    Strong,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Equation {
    pub anchor: String,
    /// "(4)"; empty for an unnumbered display.
    pub label: String,
    pub math: Math,
    /// Small print to the equation: source, meaning; empty without.
    pub note: Text,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Listing {
    pub anchor: String,
    pub caption: Text,
    pub lines: Vec<String>,
    pub numbered: bool,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Title {
    /// "Calculation record".
    pub kind: String,
    pub number: String,
    pub title: String,
    pub project: String,
    pub issuer: String,
    pub revision: String,
    pub date: String,
    pub standing: String,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Notice {
    pub tone: Tone,
    pub title: String,
    pub body: Vec<Text>,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Tone {
    /// Supported, met.
    Good,
    /// Not supported, not met.
    Bad,
    /// Holds, cautions, not resolved.
    Caution,
    Plain,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Signatory {
    /// "Originator", "Checker", "Approver".
    pub role: String,
    /// Printed name, or "none stated".
    pub name: String,
    pub capacity: String,
    pub date: String,
    /// What the signature means.
    pub meaning: String,
}

#[derive(Clone, Debug, PartialEq)]
pub struct ChecklistColumn {
    pub title: String,
    /// (already ticked, text)
    pub items: Vec<(bool, Text)>,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Figure {
    pub anchor: String,
    /// "Figure 2".
    pub label: String,
    pub caption: Text,
    /// What a reader hears who cannot see the figure.
    pub alternative: String,
    /// Path inside the package's payload, e.g. `figures/history-base.svg` or `attachments/layout.svg`.
    pub file: String,
    pub picture: Picture,
}

#[derive(Clone, Debug, PartialEq)]
pub enum Picture {
    Plot(Plot),
    /// A picture file brought by the user, as it was: SVG, PNG or JPEG.
    Sketch(Vec<u8>),
}

/// Panels stacked over one common abscissa; one panel for each unit.
#[derive(Clone, Debug, PartialEq)]
pub struct Plot {
    pub x: Axis,
    pub panels: Vec<Panel>,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Panel {
    pub y: Axis,
    pub series: Vec<Series>,
    /// Horizontal lines: limits, set points.
    pub levels: Vec<Mark>,
    /// Vertical lines: events.
    pub instants: Vec<Mark>,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Axis {
    pub title: Label,
    pub scale: Scale,
    pub low: f64,
    pub high: f64,
    /// Labelled ticks, ascending, inside [low, high].
    pub ticks: Vec<Tick>,
    /// Unlabelled ticks.
    pub minor: Vec<f64>,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Scale {
    Linear,
    Logarithmic,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Tick {
    pub at: f64,
    pub label: Label,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    pub label: Label,
    pub points: Vec<(f64, f64)>,
    /// Index into the page style's list of line styles (colour, dash, marker), legible in grey.
    pub style: usize,
    pub line: bool,
    pub markers: bool,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Mark {
    pub at: f64,
    pub label: Label,
}

/// Short text in a figure, with italics, subscripts and superscripts.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Label(pub Vec<Run>);

#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Run {
    pub text: String,
    pub italic: bool,
    pub shift: Shift,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Shift {
    Base,
    Subscript,
    Superscript,
}
