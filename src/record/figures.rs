//! Figures as data: histories by case, errors against step, lookups, sketches.

use super::block::{Axis, Figure, Inline, Label, Mark, Panel, Picture, Plot, Series, Text};
use super::data::case_stem;
use super::plot::{exact_axis, linear_axis, logarithmic_axis};
use super::words::{self, axis_label, capitalised, in_unit, label, plain_run, symbol_label, text};
use super::{Subject, alternate, stability};
use crate::evidence::{CaseEvidence, Convergence};
use crate::formula::tree::{Kind, ProbeFunction};
use crate::problem::model::{Limit, Lookup, Model};
use crate::units::Unit;

/// Every figure of the record, in its order.
pub fn figures(subject: &Subject) -> Vec<Figure> {
    let mut figures: Vec<Figure> = Vec::new();
    figures.extend(
        subject
            .model
            .sketches
            .iter()
            .enumerate()
            .map(|(index, sketch)| Figure {
                anchor: format!("sketch-{}", index + 1),
                label: String::new(),
                caption: text(sketch.text.clone()),
                alternative: format!("Sketch: {}", sketch.text),
                file: format!("attachments/{}", sketch.file),
                picture: Picture::Sketch(
                    subject
                        .model
                        .files
                        .get(&sketch.file)
                        .cloned()
                        .unwrap_or_default(),
                ),
            }),
    );
    figures.extend(subject.model.lookups.iter().map(lookup_figure));
    figures.extend(
        subject
            .cases
            .iter()
            .flat_map(|case| history_figures(subject, case)),
    );
    figures.extend(error_figure(subject));
    figures.extend(stability::figure_of_region(subject));
    figures.extend(alternate::cost_figure(subject));
    figures
}

/// The group of blocks that a figure belongs to.
pub fn group_of(figure: &Figure) -> &'static str {
    let prefix = figure.anchor.split('-').next().unwrap_or_default();
    match prefix {
        "sketch" => "sketches",
        "curve" => "lookup_figures",
        "errors" => "error_figure",
        "region" => "region_figure",
        "cost" => "cost_figure",
        _ => "history_figures",
    }
}

fn lookup_figure(lookup: &Lookup) -> Figure {
    let x = exact_axis(
        axis_label(&capitalised(&lookup.argument), "", &lookup.argument_unit),
        lookup.points.first().map_or(0.0, |point| point.0),
        lookup.points.last().map_or(1.0, |point| point.0),
    );
    let y = linear_axis(
        axis_label(&capitalised(&lookup.meaning), &lookup.symbol, &lookup.unit),
        lookup.points.iter().map(|point| point.1),
        &[],
    );
    let points = match lookup.between {
        crate::problem::model::Between::Step => stairs(&lookup.points),
        _ => lookup.points.clone(),
    };
    let series = Series {
        label: Label(symbol_label(&lookup.symbol)),
        points,
        style: 0,
        line: true,
        markers: lookup.points.len() <= 60,
    };
    Figure {
        anchor: format!("curve-{}", lookup.symbol),
        label: String::new(),
        caption: vec![
            Inline::Text(format!("{} ", capitalised(&lookup.meaning))),
            Inline::Math(crate::formula::typeset::symbol(&lookup.symbol)),
            Inline::Text(format!(" over {}, points as tabulated", lookup.argument)),
        ],
        alternative: format!(
            "Curve of {} over {} from {} points.",
            lookup.meaning,
            lookup.argument,
            lookup.points.len()
        ),
        file: format!("figures/curve-{}.svg", lookup.symbol),
        picture: Picture::Plot(Plot {
            x,
            panels: vec![Panel {
                y,
                series: vec![series],
                levels: Vec::new(),
                instants: Vec::new(),
            }],
        }),
    }
}

fn stairs(points: &[(f64, f64)]) -> Vec<(f64, f64)> {
    let mut out = Vec::new();
    for pair in points.windows(2) {
        out.push(pair[0]);
        out.push((pair[1].0, pair[0].1));
    }
    out.extend(points.last());
    out
}

/// What a history figure shows of one symbol.
struct Shown<'a> {
    symbol: &'a str,
    meaning: &'a str,
    unit: &'a Unit,
    points: Vec<(f64, f64)>,
}

/// Most panels of one figure.
const MOST_PANELS: usize = 4;

fn history_figures(subject: &Subject, case: &CaseEvidence) -> Vec<Figure> {
    let model = subject.model;
    let id = &model.cases[case.case].id;
    let stem = case_stem(model, case.case);
    let of_case = if model.cases.len() > 1 {
        format!(", case “{id}”")
    } else {
        String::new()
    };
    if model.figures.is_empty() {
        let names: Vec<&str> = model
            .states
            .iter()
            .map(|state| state.symbol.as_str())
            .chain(
                model
                    .quantities
                    .iter()
                    .map(|quantity| quantity.symbol.as_str()),
            )
            .collect();
        let marks: Vec<&str> = model.events.iter().map(|event| event.id.as_str()).collect();
        let caption = format!("History of states and quantities{of_case}");
        return vec![history_figure(
            subject,
            case,
            &names,
            &marks,
            &caption,
            &format!("history-{stem}"),
        )];
    }
    let figures = model.figures.iter().enumerate();
    figures
        .map(|(index, figure)| {
            let names: Vec<&str> = figure.show.iter().map(String::as_str).collect();
            let marks: Vec<&str> = figure.mark.iter().map(String::as_str).collect();
            let caption = format!("{}{of_case}", figure.title.trim_end_matches('.'));
            history_figure(
                subject,
                case,
                &names,
                &marks,
                &caption,
                &format!("history-{}-{stem}", index + 1),
            )
        })
        .collect()
}

fn history_figure(
    subject: &Subject,
    case: &CaseEvidence,
    names: &[&str],
    marks: &[&str],
    caption: &str,
    anchor: &str,
) -> Figure {
    let model = subject.model;
    let time = |t: f64| in_unit(model, t, &model.march.unit);
    let shown: Vec<Shown> = names
        .iter()
        .filter_map(|name| shown(model, case, name))
        .collect();
    let mut groups: Vec<Vec<&Shown>> = Vec::new();
    for one in &shown {
        match groups
            .iter_mut()
            .find(|group| group[0].unit == one.unit && group.len() < 4)
        {
            Some(group) => group.push(one),
            None => groups.push(vec![one]),
        }
    }
    groups.truncate(MOST_PANELS);
    let instants: Vec<Mark> = case
        .reported()
        .outcome
        .events
        .iter()
        .filter(|occurrence| marks.contains(&model.events[occurrence.event].id.as_str()))
        .take(12)
        .map(|occurrence| Mark {
            at: time(occurrence.at),
            label: label(&model.events[occurrence.event].id),
        })
        .collect();
    let panels: Vec<Panel> = groups
        .iter()
        .map(|group| panel(subject, case, group, &instants))
        .collect();
    let title = axis_label("", &model.march.variable, &model.march.unit);
    let listed: Vec<String> = shown
        .iter()
        .map(|one| format!("{} ({})", one.meaning, one.symbol))
        .collect();
    Figure {
        anchor: anchor.to_owned(),
        label: String::new(),
        caption: text(caption.to_owned()),
        alternative: format!(
            "{caption}: {} over {}.",
            words::listed(&listed),
            model.march.variable
        ),
        file: format!("figures/{anchor}.svg"),
        picture: Picture::Plot(Plot {
            x: exact_axis(title, time(case.from), time(case.to)),
            panels,
        }),
    }
}

fn shown<'a>(model: &'a Model, case: &CaseEvidence, name: &str) -> Option<Shown<'a>> {
    let rows = &case.reported().rows;
    let time = |t: f64| in_unit(model, t, &model.march.unit);
    if let Some(index) = model.states.iter().position(|state| state.symbol == name) {
        let state = &model.states[index];
        let points = rows
            .iter()
            .map(|row| (time(row.t), in_unit(model, row.states[index], &state.unit)))
            .collect();
        return Some(Shown {
            symbol: &state.symbol,
            meaning: &state.meaning,
            unit: &state.unit,
            points,
        });
    }
    let index = model
        .quantities
        .iter()
        .position(|quantity| quantity.symbol == name)?;
    let quantity = &model.quantities[index];
    let points = rows
        .iter()
        .map(|row| {
            (
                time(row.t),
                in_unit(model, row.quantities[index], &quantity.unit),
            )
        })
        .collect();
    Some(Shown {
        symbol: &quantity.symbol,
        meaning: &quantity.meaning,
        unit: &quantity.unit,
        points,
    })
}

fn panel(subject: &Subject, case: &CaseEvidence, group: &[&Shown], instants: &[Mark]) -> Panel {
    let levels: Vec<Mark> = group
        .iter()
        .flat_map(|one| limit_marks(subject, case, one))
        .collect();
    let held: Vec<f64> = levels.iter().map(|mark| mark.at).collect();
    let values: Vec<f64> = group
        .iter()
        .flat_map(|one| one.points.iter().map(|point| point.1))
        .collect();
    let title = match group {
        [one] => axis_label(
            &capitalised(short_meaning(one.meaning)),
            one.symbol,
            one.unit,
        ),
        several => {
            let mut runs = Vec::new();
            for (index, one) in several.iter().enumerate() {
                if index > 0 {
                    runs.push(plain_run(", "));
                }
                runs.extend(symbol_label(one.symbol));
            }
            runs.push(plain_run(&format!(" / {}", several[0].unit.print())));
            Label(runs)
        }
    };
    let y: Axis = linear_axis(title, values, &held);
    let series = group
        .iter()
        .enumerate()
        .map(|(style, one)| Series {
            label: Label(symbol_label(one.symbol)),
            points: one.points.clone(),
            style,
            line: true,
            markers: false,
        })
        .collect();
    Panel {
        y,
        series,
        levels,
        instants: instants.to_vec(),
    }
}

/// The first words of a meaning, short enough for an axis.
fn short_meaning(meaning: &str) -> &str {
    const LONGEST: usize = 26;
    if meaning.chars().count() <= LONGEST {
        return meaning;
    }
    let cut: usize = meaning
        .char_indices()
        .nth(LONGEST)
        .map_or(meaning.len(), |(at, _)| at);
    meaning[..cut].rfind(' ').map_or("", |at| {
        meaning[..at]
            .trim_end_matches(" of")
            .trim_end_matches(" the")
            .trim_end_matches(" at")
            .trim_end_matches(" above")
    })
}

/// Limits of criteria on the extreme or last value of this symbol.
fn limit_marks(subject: &Subject, case: &CaseEvidence, one: &Shown) -> Vec<Mark> {
    let model = subject.model;
    let mut marks = Vec::new();
    for (index, criterion) in model
        .criteria
        .iter()
        .enumerate()
        .filter(|(_, criterion)| criterion.cases.contains(&case.case))
    {
        let Kind::Probe(
            ProbeFunction::Largest | ProbeFunction::Smallest | ProbeFunction::Final,
            arguments,
        ) = &model.results[criterion.result].formula.tree.kind
        else {
            continue;
        };
        if !matches!(&arguments[0].kind, Kind::Symbol(name) if name == one.symbol) {
            continue;
        }
        let sign = match criterion.limit {
            Limit::AtMost(_) => "at most",
            Limit::AtLeast(_) => "at least",
            Limit::Between(..) => "limit",
        };
        for limit in &case.limits[index] {
            let value = in_unit(model, *limit, one.unit);
            let words = format!(
                "{}: {sign} {}",
                criterion.id,
                one.unit.after(&words::trimmed(value))
            );
            marks.push(Mark {
                at: value,
                label: label(&words),
            });
        }
    }
    marks
}

/// Error estimates of the judged results against the step, with a line of the method's order.
fn error_figure(subject: &Subject) -> Option<Figure> {
    let model = subject.model;
    let case = subject.cases.first()?;
    let step = words::difference_in_unit(case.longest_step, &model.march.unit);
    let steps: Vec<f64> = (0..case.levels.len())
        .map(|level| step / f64::from(1u32 << level))
        .collect();
    let mut series: Vec<Series> = Vec::new();
    for (index, evidence) in case.results.iter().enumerate() {
        let judged = model.criteria.is_empty()
            || model
                .criteria
                .iter()
                .any(|criterion| criterion.result == index);
        let smooth = matches!(
            evidence.ladder.convergence,
            Convergence::Asymptotic | Convergence::OrderReduced | Convergence::OrderIrregular
        );
        let (Some(limit), Some(value)) = (evidence.ladder.extrapolated, evidence.ladder.reported())
        else {
            continue;
        };
        let scale = model.results[index].scale.unwrap_or(value.abs());
        if !judged || !smooth || scale == 0.0 || series.len() == MOST_ERROR_SERIES {
            continue;
        }
        let points: Vec<(f64, f64)> = steps
            .iter()
            .zip(&evidence.ladder.values)
            .filter_map(|(h, value)| Some((*h, ((*value)? - limit).abs() / scale)))
            .filter(|(_, error)| *error > 0.0)
            .collect();
        if points.len() > 1 {
            series.push(Series {
                label: Label(symbol_label(&model.results[index].symbol)),
                points,
                style: series.len(),
                line: true,
                markers: true,
            });
        }
    }
    let first = series.first()?.points.clone();
    let order = case.method.order;
    // The reference passes half a decade below the first curve, so that it hides none.
    let (h0, e0) = first[0];
    let slope = |h: f64| 0.3 * e0 * crate::float::powi(h / h0, order as i32);
    let reference = Series {
        label: label(&format!("slope {order}")),
        points: steps.iter().map(|h| (*h, slope(*h))).collect(),
        style: REFERENCE_STYLE,
        line: true,
        markers: false,
    };
    series.push(reference);
    let x = logarithmic_axis(step_label(model), steps.iter().copied());
    let y = logarithmic_axis(
        label("Estimated error, relative"),
        series
            .iter()
            .flat_map(|one| one.points.iter().map(|point| point.1))
            .collect::<Vec<_>>(),
    );
    let caption: Text = text(format!(
        "Estimated error of the judged results against the step, case “{}”, with the slope of order {order}",
        model.cases[case.case].id
    ));
    Some(Figure {
        anchor: "errors".to_owned(),
        label: String::new(),
        caption,
        alternative: format!(
            "Estimated relative error against step on logarithmic axes; a line shows the slope of order {order}."
        ),
        file: "figures/errors.svg".to_owned(),
        picture: Picture::Plot(Plot {
            x,
            panels: vec![Panel {
                y,
                series,
                levels: Vec::new(),
                instants: Vec::new(),
            }],
        }),
    })
}

/// "Step Δt / s".
fn step_label(model: &Model) -> Label {
    let mut runs = vec![plain_run("Step  Δ")];
    runs.extend(symbol_label(&model.march.variable));
    runs.push(plain_run(&format!(
        " / {}",
        model.march.unit.difference_unit().print()
    )));
    Label(runs)
}

const MOST_ERROR_SERIES: usize = 4;
/// The page style's line for references.
const REFERENCE_STYLE: usize = usize::MAX;
