//! The same judgement in a few lines, for a terminal.

use super::Subject;
use super::block::Inline;
use super::cover::finding;
use super::results::did_not_occur;
use super::words::{self, by_uncertainty};
use crate::float::Numeral;

/// A line of the report, or a table whose columns the terminal aligns.
pub enum Line {
    Words(String),
    Table(Vec<Vec<String>>),
}

/// The report, finding first.
pub fn lines(subject: &Subject) -> Vec<Line> {
    let model = subject.model;
    let head = &model.head;
    let mut lines = vec![Line::Words(format!(
        "{} revision {}, {}: {}",
        head.number,
        head.revision,
        head.standing.word(),
        head.title
    ))];
    let notice = finding(subject);
    lines.push(Line::Words(notice.title));
    for text in notice.body {
        let words: String = text
            .into_iter()
            .map(|piece| {
                if let Inline::Text(words) = piece {
                    words
                } else {
                    String::new()
                }
            })
            .collect();
        lines.push(Line::Words(format!("  {words}")));
    }
    for case in subject.cases {
        lines.push(Line::Words(format!(
            "\nCase {} ({})",
            model.cases[case.case].id,
            words::count(case.steps, "step", "steps")
        )));
        let rows = model
            .results
            .iter()
            .zip(&case.results)
            .map(|(spec, evidence)| {
                let ladder = &evidence.ladder;
                match ladder.reported() {
                    Some(value) => {
                        let rounded = by_uncertainty(model, value, ladder.uncertainty, &spec.unit);
                        let order = ladder.observed_order.map_or_else(String::new, |order| {
                            format!("order {}", Numeral::decimals(order, 2).typographic())
                        });
                        let uncertainty = if ladder.uncertainty.is_some() {
                            format!("± {}", rounded.uncertainty)
                        } else {
                            "no band".to_owned()
                        };
                        vec![
                            spec.symbol.clone(),
                            rounded.value,
                            uncertainty,
                            spec.unit.print(),
                            ladder.convergence.word().to_owned(),
                            order,
                        ]
                    }
                    None => vec![
                        spec.symbol.clone(),
                        "–".to_owned(),
                        String::new(),
                        String::new(),
                        did_not_occur(model, case),
                    ],
                }
            });
        lines.push(Line::Table(rows.collect()));
        let judged = subject
            .verdict
            .judgements
            .iter()
            .filter(|judgement| judgement.case == case.case);
        let rows: Vec<Vec<String>> = judged
            .map(|judgement| {
                let criterion = &model.criteria[judgement.criterion];
                let spec = &model.results[criterion.result];
                let margin = judgement.margin_of_band.map_or_else(String::new, |margin| {
                    let number =
                        Numeral::significant(words::difference_in_unit(margin, &spec.unit), 3)
                            .typographic();
                    format!(
                        "margin of band {}",
                        spec.unit.difference_unit().after(&number)
                    )
                });
                vec![
                    criterion.id.clone(),
                    judgement.finding.word().to_owned(),
                    margin,
                    judgement.reason.clone().unwrap_or_default(),
                ]
            })
            .collect();
        if !rows.is_empty() {
            lines.push(Line::Table(rows));
        }
    }
    lines
}
