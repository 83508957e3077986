//! Alternate integration and cost of accuracy, in words and one figure.

use super::Subject;
use super::block::{Axis, Block, Figure, Label, Panel, Picture, Plot, Series, Text};
use super::plot::logarithmic_axis;
use super::words::{self, label, listed, text};
use crate::evidence::{CaseEvidence, Comparison, Cost};
use crate::float::Numeral;
use crate::problem::model::Model;

/// One paragraph for each case.
pub fn sentences(subject: &Subject) -> Vec<Block> {
    let cases = subject.cases.iter();
    cases
        .map(|case| Block::Paragraph(sentence(subject.model, case)))
        .collect()
}

fn sentence(model: &Model, case: &CaseEvidence) -> Text {
    let id = &model.cases[case.case].id;
    let alternate = &case.alternate;
    let mut words = text(format!("Case “{id}”, by {}: ", alternate.family));
    if let Some(cause) = &alternate.failure {
        words.extend(text(format!("no comparison, because {cause}.")));
        return words;
    }
    words.extend(text("it met the same events"));
    let verbs = [
        ("agrees", "agrees on"),
        ("disagrees", "disagrees on"),
        ("not compared", "has nothing to compare for"),
    ];
    for (word, verb) in verbs {
        let results = model.results.iter().zip(&alternate.results);
        let names = results.filter(|(_, comparison)| comparison.word() == word);
        for (position, (spec, _)) in names.enumerate() {
            let before = if position == 0 {
                format!("; it {verb} ")
            } else {
                ", ".to_owned()
            };
            words.extend(text(before));
            words.extend(words::symbol(&spec.symbol));
        }
    }
    words.extend(text("."));
    words
}

/// "within 0.004 min", a bound made of numbers that no processor changes.
pub fn cell(model: &Model, result: usize, comparison: Comparison) -> String {
    let unit = &model.results[result].unit;
    let spell = |bound: f64| {
        unit.difference_unit()
            .after(&Numeral::rounded_up(words::difference_in_unit(bound, unit), 1).typographic())
    };
    match comparison {
        Comparison::Agrees { bound } => format!("within {}", spell(bound)),
        Comparison::Disagrees { bound: Some(bound) } => {
            format!("disagrees: within {} only", spell(bound))
        }
        Comparison::Disagrees { bound: None } => "disagrees".to_owned(),
        Comparison::NotCompared => "not compared".to_owned(),
    }
}

/// Whether the comparison is wider than the nearest margin of a criterion on the result.
pub fn is_without_force(
    subject: &Subject,
    case: usize,
    result: usize,
    comparison: Comparison,
) -> bool {
    let Comparison::Agrees { bound } = comparison else {
        return false;
    };
    let own = |judgement: &&crate::judgement::Judgement| {
        judgement.case == case && subject.model.criteria[judgement.criterion].result == result
    };
    subject
        .verdict
        .judgements
        .iter()
        .filter(own)
        .filter_map(|judgement| judgement.margin)
        .any(|margin| bound > margin.abs())
}

/// What a neighbouring method would have cost for the same error.
pub fn cost_sentence(subject: &Subject) -> Option<String> {
    let cost = subject.cases[0].cost.as_ref()?;
    let (requested, neighbours) = cost.curves.split_first()?;
    let (evaluations, error) = *requested.points.first()?;
    let mut parts: Vec<String> = Vec::new();
    for curve in neighbours {
        let Some(needed) = curve.evaluations_for(error) else {
            let own = words::as_written(curve.requested as f64);
            parts.push(format!(
                "{} took {own} at the same step, with an error too small to be told",
                curve.method.title
            ));
            continue;
        };
        let ratio = needed / evaluations as f64;
        parts.push(format!(
            "{} would need about {} as many",
            curve.method.title,
            share(ratio)
        ));
    }
    (!parts.is_empty()).then(|| {
        format!(
            "Cost of accuracy: {} took {} slope evaluations to reach its error of {} in {}, relative to its scale; for the same error, by their orders, {}.",
            requested.method.title,
            words::as_written(evaluations as f64),
            Numeral::significant(error, 2).typographic(),
            subject.model.results[cost.result].symbol,
            listed(&parts)
        )
    })
}

fn share(ratio: f64) -> String {
    if ratio > 1e4 {
        return "more than ten thousand times".to_owned();
    }
    format!("{} times", Numeral::significant(ratio, 2).typographic())
}

/// Error against slope evaluations.
pub fn cost_figure(subject: &Subject) -> Option<Figure> {
    let cost: &Cost = subject.cases[0].cost.as_ref()?;
    let symbol = &subject.model.results[cost.result].symbol;
    let points = |curve: &crate::evidence::Curve| {
        curve
            .points
            .iter()
            .map(|(evaluations, error)| (*evaluations as f64, *error))
            .collect::<Vec<_>>()
    };
    let series: Vec<Series> = cost
        .curves
        .iter()
        .filter(|curve| !curve.points.is_empty())
        .enumerate()
        .map(|(style, curve)| Series {
            label: label(curve.method.name),
            points: points(curve),
            style,
            line: true,
            markers: true,
        })
        .collect();
    let all: Vec<(f64, f64)> = series.iter().flat_map(|one| one.points.clone()).collect();
    let axis = |title: &str, values: Vec<f64>| -> Axis { logarithmic_axis(label(title), values) };
    let mut title = vec![words::plain_run("Error of  ")];
    title.extend(words::symbol_label(symbol));
    title.push(words::plain_run(", relative"));
    let mut y = axis("", all.iter().map(|point| point.1).collect());
    y.title = Label(title);
    Some(Figure {
        anchor: "cost".to_owned(),
        label: String::new(),
        caption: text(format!(
            "Error of {symbol} against slope evaluations at each level, for the method requested and its neighbours in order"
        )),
        alternative: format!(
            "Relative error of {symbol} against number of slope evaluations on logarithmic axes, one line for each of {} methods.",
            series.len()
        ),
        file: "figures/cost.svg".to_owned(),
        picture: Picture::Plot(Plot {
            x: axis(
                "Slope evaluations",
                all.iter().map(|point| point.0).collect(),
            ),
            panels: vec![Panel {
                y,
                series,
                levels: Vec::new(),
                instants: Vec::new(),
            }],
        }),
    })
}
