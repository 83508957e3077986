//! Words of the originator: history, review log, basis, cautions, assumptions, references, attachments.

use super::block::{Align, Block, Column, Inline, Notice, Row, RowKind, Table, Text, Tone};
use super::words::{capitalised, text};
use super::{Blocks, Delivery, Subject};
use crate::problem::model::AssumptionStanding;

pub fn add(subject: &Subject, delivery: &Delivery, blocks: &mut Blocks) {
    let model = subject.model;
    blocks.insert(
        "revisions",
        table_or_none(
            "revisions",
            "Revision history",
            &["Mark", "Date", "Change", "By"],
            revisions(subject),
        ),
    );
    blocks.insert(
        "comments",
        table_or_none(
            "comments",
            "Review log",
            &["Id", "By", "On", "Comment", "Response", "Standing"],
            comments(subject),
        ),
    );
    blocks.insert("basis", vec![paragraph(&model.head.basis)]);
    blocks.insert("limits", vec![paragraph(&model.head.limits)]);
    blocks.insert(
        "validation",
        table_or_none(
            "validation",
            "Comparison with test or field data",
            &["Comparison", "Source"],
            pairs(&model.validations),
        ),
    );
    blocks.insert(
        "known_errors",
        table_or_none(
            "known-errors",
            "Known errors considered",
            &["Error", "Bearing on this calculation"],
            pairs(&model.known_errors),
        ),
    );
    blocks.insert("caution", vec![Block::Notice(cautions(subject))]);
    blocks.insert(
        "assumptions",
        table_or_none(
            "assumptions",
            "Assumptions",
            &["Id", "Assumption", "Basis", "Standing"],
            assumptions(subject),
        ),
    );
    blocks.insert(
        "references",
        table_or_none(
            "references",
            "References",
            &["Id", "Reference", "Kind", "Edition", "Clause"],
            references(subject),
        ),
    );
    blocks.insert("files", vec![Block::Table(files(delivery))]);
    blocks.insert(
        "fingerprint_line",
        vec![Block::Paragraph(vec![Inline::Code(
            delivery.fingerprint.clone(),
        )])],
    );
    blocks.insert(
        "command",
        vec![Block::Paragraph(vec![Inline::Code(format!(
            "countermarch issue {}",
            model.file
        ))])],
    );
    blocks.insert(
        "problem_file",
        vec![Block::Listing(super::block::Listing {
            anchor: "problem-file".to_owned(),
            caption: vec![
                Inline::Text("Problem file ".to_owned()),
                Inline::Code(model.file.clone()),
            ],
            lines: model.text.lines().map(str::to_owned).collect(),
            numbered: true,
        })],
    );
}

fn paragraph(words: &Option<String>) -> Block {
    Block::Paragraph(text(capitalised(
        words.as_deref().unwrap_or("none stated."),
    )))
}

/// A table of words; "None stated." when there are no rows. Columns that are empty in every row are left out.
fn table_or_none(anchor: &str, caption: &str, heads: &[&str], rows: Vec<Vec<Text>>) -> Vec<Block> {
    if rows.is_empty() {
        return vec![Block::Paragraph(text("None stated."))];
    }
    let is_empty = |cell: &Text| matches!(&cell[..], [Inline::Text(words)] if words == DASH || words.is_empty());
    let kept: Vec<usize> = (0..heads.len())
        .filter(|column| !rows.iter().all(|row| is_empty(&row[*column])))
        .collect();
    let pick = |row: Vec<Text>| -> Vec<Text> {
        let mut cells: Vec<Option<Text>> = row.into_iter().map(Some).collect();
        kept.iter()
            .filter_map(|column| cells[*column].take())
            .collect()
    };
    vec![Block::Table(Table {
        anchor: anchor.to_owned(),
        label: String::new(),
        caption: text(caption),
        columns: kept
            .iter()
            .map(|column| Column {
                heading: text(heads[*column]),
                align: Align::Left,
            })
            .collect(),
        rows: rows
            .into_iter()
            .map(|row| Row {
                cells: pick(row),
                kind: RowKind::Body,
            })
            .collect(),
        note: Vec::new(),
    })]
}

/// Where a cell has nothing to say.
const DASH: &str = "–";

fn or_dash(words: &Option<String>) -> Text {
    text(words.as_deref().unwrap_or(DASH))
}

fn revisions(subject: &Subject) -> Vec<Vec<Text>> {
    let rows = subject.model.revisions.iter();
    rows.map(|revision| {
        let date = revision
            .date
            .map(|date| date.to_string())
            .unwrap_or_default();
        vec![
            text(revision.mark.clone()),
            text(date),
            text(revision.change.clone()),
            or_dash(&revision.by),
        ]
    })
    .collect()
}

fn comments(subject: &Subject) -> Vec<Vec<Text>> {
    let rows = subject.model.comments.iter();
    rows.map(|comment| {
        vec![
            text(comment.id.clone()),
            text(comment.by.clone()),
            or_dash(&comment.on),
            text(comment.text.clone()),
            or_dash(&comment.response),
            text(comment.standing.clone()),
        ]
    })
    .collect()
}

fn pairs(list: &[(String, String)]) -> Vec<Vec<Text>> {
    list.iter()
        .map(|(first, second)| vec![text(first.clone()), text(second.clone())])
        .collect()
}

fn cautions(subject: &Subject) -> Notice {
    let mut body = vec![
        text(
            "Numerical evidence shows that the stated equations were solved right, not that they are the right equations.",
        ),
        text(
            "Adequacy of the model, of its inputs and of its use, and compliance with codes and local rules, are for a competent engineer to judge, licensed where the law requires it.",
        ),
    ];
    if let Some(caution) = &subject.model.head.caution {
        body.push(text(caution.clone()));
    }
    Notice {
        tone: Tone::Caution,
        title: "Cautions".to_owned(),
        body,
    }
}

fn assumptions(subject: &Subject) -> Vec<Vec<Text>> {
    let rows = subject.model.assumptions.iter();
    rows.map(|assumption| {
        let standing = match &assumption.standing {
            AssumptionStanding::Confirmed => "confirmed".to_owned(),
            AssumptionStanding::ToBeConfirmed => "to be confirmed".to_owned(),
            AssumptionStanding::TestedBy(criterion) => {
                let index = subject
                    .model
                    .criteria
                    .iter()
                    .position(|other| &other.id == criterion);
                let word = index.map_or("not resolved", |index| {
                    subject.verdict.finding(index).word()
                });
                format!("tested by {criterion}: {word}")
            }
        };
        vec![
            text(assumption.id.clone()),
            text(assumption.text.clone()),
            text(assumption.basis.clone()),
            text(standing),
        ]
    })
    .collect()
}

fn references(subject: &Subject) -> Vec<Vec<Text>> {
    let rows = subject.model.references.iter();
    rows.map(|reference| {
        vec![
            text(reference.id.clone()),
            text(reference.text.clone()),
            or_dash(&reference.kind),
            or_dash(&reference.edition),
            or_dash(&reference.clause),
        ]
    })
    .collect()
}

/// Every file of the package but the record itself, with size and digest.
fn files(delivery: &Delivery) -> Table {
    let column = |name: &str, align: Align| Column {
        heading: text(name),
        align,
    };
    Table {
        anchor: "files".to_owned(),
        label: String::new(),
        caption: text("Files of the package"),
        columns: vec![
            column("File", Align::Left),
            column("Bytes", Align::Right),
            column("SHA-256", Align::Left),
        ],
        rows: delivery
            .files
            .iter()
            .map(|(path, size, digest)| Row {
                cells: vec![
                    vec![Inline::Code(path.clone())],
                    text(super::words::as_written(*size as f64)),
                    vec![Inline::Code(digest.clone())],
                ],
                kind: RowKind::Body,
            })
            .collect(),
        note: text(
            "The record itself, in PDF and in Markdown, is listed in the package’s manifest.",
        ),
    }
}
