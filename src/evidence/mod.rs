//! Evidence: what must be shown before a number may be relied on.
//!
//! Owns: the step-halving ladder of every result, state and case; checks on the physics. Does not own: judgement
//! against criteria.

use crate::calculation::{
    self, Cause, Compiled, Prepared, Solution, Trouble, Unsolvable, WorkedStep,
};
use crate::float;
use crate::march::{Method, RowKind, StopReason};
use crate::problem::model::Model;

pub use self::advice::{instant, step as step_words};
pub use self::alternate::{Alternate, Comparison};
pub use self::checks::{BalanceEvidence, ClosedFormEvidence};
pub use self::cost::{Cost, Curve};
pub use self::ladder::{Convergence, Ladder, Roundoff};
pub use self::stability::{At, Run, Stability};

pub mod advice;
pub mod alternate;
mod checks;
mod cost;
mod crossing;
pub mod ladder;
mod reader;
pub mod region;
mod stability;

/// Everything computed for one case.
pub struct CaseEvidence {
    /// Index into the model's cases.
    pub case: usize,
    pub method: &'static Method,
    pub from: f64,
    pub to: f64,
    /// Number of steps at the requested grid.
    pub steps: u64,
    pub longest_step: f64,
    /// Title of the pair that chose the grid, where one did.
    pub chosen_by: Option<&'static str>,
    /// Ends of segments whose last interval is shorter.
    pub short_intervals: Vec<f64>,
    /// One for each level: the requested grid first.
    pub levels: Vec<Solution>,
    /// In the order of the model's results.
    pub results: Vec<ResultEvidence>,
    /// In the order of the model's states.
    pub histories: Vec<HistoryEvidence>,
    /// In the order of the model's balances.
    pub balances: Vec<BalanceEvidence>,
    /// Those of this case, in the order of the model's closed forms.
    pub closed_forms: Vec<ClosedFormEvidence>,
    pub stability: Stability,
    pub alternate: Alternate,
    /// Of the base case.
    pub cost: Option<Cost>,
    /// Limits of the criteria, in SI.
    pub limits: Vec<Vec<f64>>,
    pub initial: Vec<f64>,
    /// The first step and the step of largest scaled slope, in full.
    pub worked: Vec<WorkedStep>,
}

/// The ladder of a result, and what may have disturbed it.
#[derive(Clone, Debug)]
pub struct ResultEvidence {
    pub ladder: Ladder,
    /// Why it is not converged, where the program can name it.
    pub cause: Option<String>,
}

/// The ladder of a state's history: of its largest differences between levels.
#[derive(Clone, Debug)]
pub struct HistoryEvidence {
    /// Largest difference between neighbouring levels over the reporting points.
    pub differences: Vec<f64>,
    pub observed_order: Option<f64>,
}

impl CaseEvidence {
    /// The march that was requested, which is the one that is reported.
    pub fn reported(&self) -> &Solution {
        &self.levels[0]
    }
}

/// All evidence for every case.
///
/// # Errors
/// The first case that cannot be laid out, by index.
pub fn gather(model: &Model) -> Result<Vec<CaseEvidence>, (usize, Unsolvable)> {
    let compiled = Compiled::new(model);
    let marched = march_cases(model, &compiled)?;
    let scales = scales(model, &marched);
    Ok(marched
        .into_iter()
        .enumerate()
        .map(|(case, (prepared, levels))| case_evidence(model, case, prepared, levels, &scales))
        .collect())
}

/// The ladders alone, for every result of every case.
///
/// # Errors
/// The first case that cannot be laid out, by index.
pub fn ladders(model: &Model) -> Result<Vec<Vec<ResultEvidence>>, (usize, Unsolvable)> {
    let compiled = Compiled::new(model);
    let marched = march_cases(model, &compiled)?;
    let scales = scales(model, &marched);
    Ok(marched
        .iter()
        .map(|(prepared, levels)| case_ladders(model, prepared.method, levels, &scales))
        .collect())
}

/// A case laid out, and its march at every level.
type Marched<'a> = (Prepared<'a>, Vec<Solution>);

fn march_cases<'a>(
    model: &Model,
    compiled: &'a Compiled,
) -> Result<Vec<Marched<'a>>, (usize, Unsolvable)> {
    let mut marched = Vec::new();
    for index in 0..model.cases.len() {
        let mut prepared =
            calculation::prepare(model, compiled, index).map_err(|error| (index, error))?;
        let levels: Vec<Solution> = (0..model.march.levels)
            .map(|level| calculation::solve(model, &mut prepared, level))
            .collect();
        marched.push((prepared, levels));
    }
    Ok(marched)
}

/// The scale of a result is its largest magnitude over all levels and cases.
fn scales(model: &Model, marched: &[Marched]) -> Vec<f64> {
    (0..model.results.len())
        .map(|result| {
            let all = marched
                .iter()
                .flat_map(|(_, levels)| levels.iter().filter_map(|level| level.results[result]));
            model.results[result]
                .scale
                .unwrap_or_else(|| all.map(f64::abs).fold(0.0, float::max))
        })
        .collect()
}

fn case_ladders(
    model: &Model,
    method: &Method,
    levels: &[Solution],
    scales: &[f64],
) -> Vec<ResultEvidence> {
    // A kink inside a step holds every method to second order (common practice, no source).
    let order = if kinked(levels) {
        method.order.min(2)
    } else {
        method.order
    };
    let events_differ = differing_events(model, levels);
    (0..model.results.len())
        .map(|result| {
            let values: Vec<Option<f64>> =
                levels.iter().map(|level| level.results[result]).collect();
            let roundoff = Roundoff {
                scale: scales[result],
                path: path_ratio(levels) * scales[result],
            };
            result_evidence(
                model,
                result,
                &values,
                levels,
                &events_differ,
                order,
                roundoff,
            )
        })
        .collect()
}

fn case_evidence(
    model: &Model,
    case: usize,
    mut prepared: Prepared,
    levels: Vec<Solution>,
    scales: &[f64],
) -> CaseEvidence {
    let results = case_ladders(model, prepared.method, &levels, scales);
    let histories = (0..model.states.len())
        .map(|state| history(&levels, state))
        .collect();
    let scale = levels[0].outcome.scale.clone();
    let worked = prepared
        .steps_to_show(&scale)
        .iter()
        .filter_map(|step| prepared.worked(step))
        .collect();
    let balances = checks::balances(model, &mut prepared, &levels);
    let closed_forms = checks::closed_forms(model, case, &mut prepared, &levels[0], scales);
    let stability = stability::stability(&mut prepared, levels[0].outcome.steps);
    let alternate = alternate::alternate(
        model,
        &mut prepared,
        &levels[0],
        &results,
        &stability,
        scales,
    );
    let cost = if case == 0 {
        cost::cost(model, &mut prepared, &levels, &results, scales)
    } else {
        None
    };
    CaseEvidence {
        case,
        method: prepared.method,
        from: prepared.from,
        to: prepared.to,
        steps: prepared.grid.steps(0),
        longest_step: prepared.grid.longest_step(),
        chosen_by: prepared.chosen_by,
        short_intervals: prepared.grid.short_last_intervals().collect(),
        results,
        histories,
        balances,
        closed_forms,
        stability,
        alternate,
        cost,
        limits: prepared.limits.clone(),
        initial: prepared.initial.clone(),
        levels,
        worked,
    }
}

/// Why levels cannot differ yet where a result is read off.
///
/// Inside the very first step every level takes the same partial step; and a chain of states needs a step for each
/// before the last one moves, so that values there may be equal and wrong at every level.
fn too_early(result: usize, values: &[Option<f64>], levels: &[Solution]) -> Option<String> {
    let begun = levels.last()?.steps_begun[result]?;
    let are_equal = values.iter().all(|value| *value == values[0]);
    let place = if begun == 1 {
        "inside the first step at every level, so that the levels cannot differ"
    } else if are_equal {
        "within the first few steps and does not differ between levels"
    } else {
        return None;
    };
    Some(format!("it is read off {place}; take a shorter step"))
}

/// "the step requested", "step/4".
fn level_words(level: usize) -> String {
    if level == 0 {
        "the step requested".to_owned()
    } else {
        format!("step/{}", 1u32 << level)
    }
}

/// Whether a step of some level holds a kink.
fn kinked(levels: &[Solution]) -> bool {
    levels
        .iter()
        .any(|level| level.outcome.kink_steps.iter().any(|steps| *steps > 0))
}

/// How far states travel for their size: the share of round-off that a march can gather.
fn path_ratio(levels: &[Solution]) -> f64 {
    levels
        .iter()
        .flat_map(|level| level.outcome.path.iter().zip(&level.outcome.scale))
        .filter(|(_, scale)| **scale > 0.0)
        .map(|(path, scale)| path / scale)
        .fold(1.0, float::max)
}

/// Events, by index, whose list of occurrences is not the same at all levels.
fn differing_events(model: &Model, levels: &[Solution]) -> Vec<usize> {
    let count = |level: &Solution, event: usize| {
        level.outcome.event_counts.get(event).copied().unwrap_or(0)
    };
    let order = |level: &Solution| {
        level
            .outcome
            .events
            .iter()
            .map(|occurrence| occurrence.event)
            .collect::<Vec<_>>()
    };
    let mut differing: Vec<usize> = (0..model.events.len())
        .filter(|event| {
            levels
                .iter()
                .any(|level| count(level, *event) != count(&levels[0], *event))
        })
        .collect();
    if differing.is_empty() && levels.iter().any(|level| order(level) != order(&levels[0])) {
        differing = (0..model.events.len())
            .filter(|event| count(&levels[0], *event) > 0)
            .collect();
    }
    differing
}

fn result_evidence(
    model: &Model,
    result: usize,
    values: &[Option<f64>],
    levels: &[Solution],
    differing: &[usize],
    order: u32,
    roundoff: Roundoff,
) -> ResultEvidence {
    let spec = &model.results[result];
    if let Some((level, failed)) = levels
        .iter()
        .enumerate()
        .find(|(_, level)| !level.is_complete())
    {
        let cause = format!(
            "the march at {} ended early: {}",
            level_words(level),
            stop_sentence(model, failed)
        );
        return ResultEvidence {
            ladder: Ladder::not_converged(values),
            cause: Some(cause),
        };
    }
    if let Some(cause) = too_early(result, values, levels) {
        return ResultEvidence {
            ladder: Ladder::not_converged(values),
            cause: Some(cause),
        };
    }
    let ladder = if is_discrete(model, result) {
        Ladder::discrete(values)
    } else {
        Ladder::of(values, order, roundoff)
    };
    let used = spec.formula.tree.symbols();
    let disturbed: Vec<&str> = differing
        .iter()
        .map(|event| model.events[*event].id.as_str())
        // An event that changes the march disturbs every result; a noted one those that name it.
        .filter(|id| {
            let event = model.events.iter().find(|event| event.id == *id);
            event.is_some_and(|event| !matches!(event.action, crate::problem::model::Action::Note))
                || used.iter().any(|(symbol, _)| symbol == id)
        })
        .collect();
    if !disturbed.is_empty() {
        let cause = format!(
            "the occurrences of {} are not the same at all levels",
            disturbed.join(", ")
        );
        return ResultEvidence {
            ladder: Ladder::not_converged(values),
            cause: Some(cause),
        };
    }
    let jumped = levels.iter().any(|level| level.outcome.jump_steps > 0);
    let ladder = if jumped {
        ladder.at_most_reduced()
    } else {
        ladder
    };
    let cause = match ladder.convergence {
        _ if jumped => {
            Some("a rate jumps inside a step more often than the march stops for".to_owned())
        }
        Convergence::OrderReduced | Convergence::NotConverged if kinked(levels) => {
            Some("a rate has a kink inside a step".to_owned())
        }
        Convergence::NotConverged
            if values.iter().any(Option::is_none) && values.iter().any(Option::is_some) =>
        {
            Some("it has a value at some levels only".to_owned())
        }
        _ => None,
    };
    ResultEvidence { ladder, cause }
}

/// Counts, and what is made of counts alone.
fn is_discrete(model: &Model, result: usize) -> bool {
    use crate::formula::tree::{Kind, ProbeFunction};
    let (mut counts, mut others) = (0, 0);
    model.results[result]
        .formula
        .tree
        .walk(&mut |tree| match &tree.kind {
            Kind::Probe(ProbeFunction::CountOf, _) => counts += 1,
            Kind::Probe(..) => others += 1,
            _ => {}
        });
    counts > 0 && others == 0
}

fn history(levels: &[Solution], state: usize) -> HistoryEvidence {
    let column = |level: &Solution| -> Vec<(f64, f64)> {
        level
            .rows
            .iter()
            .filter(|row| row.kind == RowKind::Report)
            .map(|row| (row.t, row.states[state]))
            .collect()
    };
    let columns: Vec<Vec<(f64, f64)>> = levels.iter().map(column).collect();
    let differences: Vec<f64> = columns
        .windows(2)
        .map(|pair| {
            pair[0]
                .iter()
                .zip(&pair[1])
                .filter(|(a, b)| a.0 == b.0)
                .map(|(a, b)| (a.1 - b.1).abs())
                .fold(0.0, float::max)
        })
        .collect();
    let observed_order = match differences[..] {
        [.., older, newer] if older > 0.0 && newer > 0.0 => {
            Some(float::ln(older / newer) / std::f64::consts::LN_2)
        }
        _ => None,
    };
    HistoryEvidence {
        differences,
        observed_order,
    }
}

/// Why a march ended, as the end of a sentence.
pub fn stop_sentence(model: &Model, solution: &Solution) -> String {
    let unit = &model.march.unit;
    let at = unit
        .from_si(solution.outcome.stop.at, model.ambient)
        .unwrap_or(f64::NAN);
    let at = format!(
        "{} = {}",
        model.march.variable,
        unit.after(&float::Numeral::significant(at, 5).typographic())
    );
    let state = |index: usize| {
        model
            .states
            .get(index)
            .map_or("a quadrature", |state| state.symbol.as_str())
    };
    match solution.outcome.stop.reason {
        StopReason::EndOfSpan => "the end of the span was reached".to_owned(),
        StopReason::Event(event) => {
            format!("event {} stopped the march at {at}", model.events[event].id)
        }
        StopReason::TrueAtStart { event } => format!(
            "the condition of event {} is true at the start",
            model.events[event].id
        ),
        StopReason::LeftRange { state: index } => {
            format!("{} left its permitted range at {at}", state(index))
        }
        StopReason::NotFinite { state: index } => match &solution.trouble {
            None => format!("{} has no finite value beyond {at}", state(index)),
            Some(trouble) => format!(
                "{} has no finite value beyond {at}: {}",
                state(index),
                trouble_sentence(model, trouble)
            ),
        },
        StopReason::Chattering { event } => format!(
            "event {} sets again and again within one step at {at}",
            model.events[event].id
        ),
        StopReason::NewtonFailed { state: index } => format!(
            "Newton’s iteration found no value of {} near {at}",
            state(index)
        ),
        StopReason::CorrectorFailed { state: index } => format!(
            "the repeated corrector did not settle on a value of {} near {at}",
            state(index)
        ),
        StopReason::TooManySteps { steps, limit } => {
            format!("{steps} steps are more than the limit of {limit}")
        }
    }
}

/// What had no finite value, as the end of a sentence.
fn trouble_sentence(model: &Model, trouble: &Trouble) -> String {
    // Nine digits, so that an argument just beyond a range does not print as its end.
    let number = |value: f64| {
        let rounded = float::Numeral::significant(value, 9)
            .plain()
            .parse::<f64>()
            .unwrap_or(value);
        float::Numeral::shortest(rounded).typographic()
    };
    match &trouble.cause {
        Cause::OutsideLookup { lookup, argument } => {
            let lookup = &model.lookups[*lookup];
            let unit = &lookup.argument_unit;
            let (first, last) = (lookup.points[0].0, lookup.points[lookup.points.len() - 1].0);
            let argument = unit.from_si(*argument, model.ambient).unwrap_or(f64::NAN);
            format!(
                "the lookup {} was asked for {}, outside its range from {} to {}",
                lookup.symbol,
                unit.after(&number(argument)),
                number(first),
                unit.after(&number(last))
            )
        }
        Cause::Operation { arguments } => {
            let arguments: Vec<String> = arguments.iter().map(|value| number(*value)).collect();
            format!(
                "in the formula of {}, the part {} with {} (in SI units)",
                trouble.owner,
                trouble.part,
                arguments.join(" and ")
            )
        }
    }
}
