//! Stability of the march: a sentence for each case, the table of its figures, the region with the points h·λ.

use super::Subject;
use super::block::{
    Align, Axis, Block, Column, Figure, Label, Panel, Picture, Plot, Row, RowKind, Run, Series,
    Shift, Table,
};
use super::plot::exact_axis;
use super::words::{self, label, plain_run, text};
use crate::evidence::region::{Limits, boundary};
use crate::evidence::{At, CaseEvidence, instant, step_words};
use crate::float::{self, Numeral};
use crate::march::Method;

/// One paragraph for each case, in the body.
pub fn sentences(subject: &Subject) -> Vec<Block> {
    subject
        .cases
        .iter()
        .map(|case| Block::Paragraph(text(sentence(subject, case))))
        .collect()
}

fn sentence(subject: &Subject, case: &CaseEvidence) -> String {
    let model = subject.model;
    let stability = &case.stability;
    let mut words = format!("Case “{}”: ", model.cases[case.case].id);
    words.push_str(&match (stability.run, stability.largest_growth) {
        _ if stability.is_unstable() => "unstable; see what fell short.".to_owned(),
        (Some(run), _) => format!(
            "between {} and {} steps lie outside the region of stability, but a decaying mode grows no more than {} times in all, which is not called unstable.",
            instant(model, run.from),
            instant(model, run.to),
            Numeral::rounded_up(run.growth, 2).typographic()
        ),
        (None, Some(growth)) if stability.excursion.is_some() => format!("a single step, at {}, lies outside the region of stability (growth factor {}); no two in a row do.", instant(model, growth.t), figure(growth.value)),
        (None, Some(growth)) => format!("every decaying mode decays in the march too: the largest growth factor is {}, at {}.", figure(growth.value), instant(model, growth.t)),
        (None, None) => "no mode decays at any step, so that there is nothing that instability could amplify.".to_owned(),
    });
    if let Some(limit) = stability.largest_stable_step
        && !stability.is_unstable()
    {
        words.push_str(&format!(
            " The longest step stable throughout is {}; the longest taken is {}.",
            step_words(model, limit.value),
            step_words(model, case.longest_step)
        ));
    }
    if let Some(ringing) = stability.ringing {
        words.push_str(&format!(" A fast mode rings: at {} it is multiplied by {} a step, so that its error changes sign from step to step and dies slowly.", instant(model, ringing.t), figure(ringing.value)));
    }
    if stability.not_evaluated_count > 0 {
        let instants: Vec<String> = stability
            .not_evaluated
            .iter()
            .map(|t| instant(model, *t))
            .collect();
        let more = stability.not_evaluated_count - stability.not_evaluated.len() as u64;
        let rest = if more > 0 {
            format!(
                " and at {}",
                words::count(more, "further step", "further steps")
            )
        } else {
            String::new()
        };
        words.push_str(&format!(
            " Not evaluated at {}{rest}, where a derivative is not finite.",
            words::listed(&instants)
        ));
    }
    words
}

fn figure(value: f64) -> String {
    Numeral::significant(value, 3).typographic()
}

/// The figures behind the sentences.
pub fn table(subject: &Subject) -> Table {
    let model = subject.model;
    let number = |at: Option<At>| at.map_or_else(|| "–".to_owned(), |at| figure(at.value));
    let rows = subject.cases.iter().map(|case| {
        let stability = &case.stability;
        let limit = match stability.largest_stable_step {
            Some(limit) => step_words(model, limit.value),
            None if stability.largest_growth.is_some() => "any".to_owned(),
            None => "–".to_owned(),
        };
        let taken = format!(
            "{} of {}",
            words::as_written(stability.taken as f64),
            words::as_written(stability.steps as f64)
        );
        let run = stability
            .run
            .map_or_else(|| "1".to_owned(), |run| figure(run.growth));
        // Rates of change per unit of the variable.
        let fastest = stability.fastest.map_or_else(
            || "–".to_owned(),
            |at| figure(at.value / model.march.unit.difference_from_si(1.0)),
        );
        let cells = [
            model.cases[case.case].id.clone(),
            taken,
            fastest,
            number(stability.largest_growth),
            run,
            limit,
            number(stability.stiffness),
        ];
        Row {
            cells: cells.into_iter().map(text).collect(),
            kind: RowKind::Body,
        }
    });
    let per = format!(
        "Largest |λ| / (1/{})",
        model.march.unit.difference_unit().print()
    );
    let heads = [
        ("Case", Align::Left),
        ("Steps seen", Align::Right),
        (&per, Align::Right),
        ("Largest |R|", Align::Right),
        ("Growth in a run", Align::Right),
        ("Longest stable step", Align::Right),
        ("Stiffness ratio", Align::Right),
    ];
    Table {
        anchor: "stability-figures".to_owned(),
        label: String::new(),
        caption: text("Eigenvalues along the march and the method’s growth factor R(hλ)"),
        columns: heads
            .iter()
            .map(|(name, align)| Column {
                heading: text(*name),
                align: *align,
            })
            .collect(),
        rows: rows.collect(),
        note: text(
            "|R| and the stable step are those of decaying modes, Re λ ≤ −0.01 |λ|. Growth in a run: product of |R| over the worst two or more consecutive steps outside the region; above 10 the march is called unstable. Stiffness ratio: fastest to slowest decaying mode.",
        ),
    }
}

/// The region of stability with the points of every case; none where no mode is left to show.
pub fn figure_of_region(subject: &Subject) -> Option<Figure> {
    let method = subject.cases[0].method;
    let all: Vec<(f64, f64)> = subject
        .cases
        .iter()
        .flat_map(|case| case.stability.points.iter().copied())
        .collect();
    if all.is_empty() {
        return None;
    }
    let window = window(method, &all);
    let (left, right, top) = window;
    let mirrored = |points: &[(f64, f64)], sign: f64| {
        points
            .iter()
            .map(|(x, y)| (*x, sign * y))
            .collect::<Vec<_>>()
    };
    let mut series: Vec<Series> = Vec::new();
    for piece in boundary(method, window) {
        // One line where the piece meets the real axis, two where it does not.
        for sign in [1.0, -1.0] {
            series.push(Series {
                label: Label::default(),
                points: mirrored(&piece, sign),
                style: 0,
                line: true,
                markers: false,
            });
        }
    }
    let mut beyond = 0;
    for (index, case) in subject.cases.iter().enumerate().take(MOST_CASES) {
        let inside = |point: &&(f64, f64)| (left..=right).contains(&point.0) && point.1 <= top;
        let kept: Vec<(f64, f64)> = case
            .stability
            .points
            .iter()
            .filter(inside)
            .copied()
            .collect();
        beyond += case.stability.points.len() - kept.len();
        let mut points = thinned(&kept, (right - left) / 300.0);
        points.extend(mirrored(
            &points
                .iter()
                .copied()
                .filter(|point| point.1 > 0.0)
                .collect::<Vec<_>>(),
            -1.0,
        ));
        let name = if subject.cases.len() > 1 {
            subject.model.cases[case.case].id.clone()
        } else {
            "hλ".to_owned()
        };
        series.push(Series {
            label: label(&name),
            points,
            style: index + 1,
            line: false,
            markers: true,
        });
    }
    let outside = if beyond > 0 {
        format!(
            "; {} outside the frame",
            words::count(beyond as u64, "point lies", "points lie")
        )
    } else {
        String::new()
    };
    let name = method.title;
    let axis = |part: &str, low: f64, high: f64| -> Axis {
        exact_axis(
            Label(vec![plain_run(part), italic("h"), italic("λ")]),
            low,
            high,
        )
    };
    Some(Figure {
        anchor: "region".to_owned(),
        label: String::new(),
        caption: text(format!(
            "Boundary |R| = 1 of the region of stability of {name}, with the points hλ along the march{outside}"
        )),
        alternative: format!(
            "The complex plane with the boundary of the region of stability of {name} and {} points h times lambda.",
            all.len()
        ),
        file: "figures/region.svg".to_owned(),
        picture: Picture::Plot(Plot {
            x: axis("Re ", left, right),
            panels: vec![Panel {
                y: axis("Im ", -top, top),
                series,
                levels: Vec::new(),
                instants: Vec::new(),
            }],
        }),
    })
}

fn italic(letter: &str) -> Run {
    Run {
        text: letter.to_owned(),
        italic: true,
        shift: Shift::Base,
    }
}

const MOST_CASES: usize = 4;

/// Left, right and top of the frame: the region, and the points up to four times as far.
fn window(method: &'static Method, points: &[(f64, f64)]) -> (f64, f64, f64) {
    let reach = Limits::of(method).real().unwrap_or(4.0);
    let leftmost = points
        .iter()
        .map(|point| point.0)
        .filter(|x| *x >= -4.0 * reach)
        .fold(-1.2 * reach, float::min);
    let top = points
        .iter()
        .map(|point| point.1)
        .filter(|y| *y <= 4.0 * reach)
        .fold(1.2 * reach, float::max);
    (1.05 * leftmost, 0.5 * reach, 1.05 * top)
}

/// Points no nearer to each other than `least` in either direction, the first of each kept.
fn thinned(points: &[(f64, f64)], least: f64) -> Vec<(f64, f64)> {
    let mut cells = std::collections::BTreeSet::new();
    points
        .iter()
        .filter(|(x, y)| cells.insert(((x / least).round() as i64, (y / least).round() as i64)))
        .copied()
        .collect()
}
