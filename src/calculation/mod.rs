//! From a model and a case to a solved march: formulas become tapes, tapes a system, the march results.
//!
//! Owns: compilation, one march of one case at one level. Does not own: what several levels show (`evidence`).
//! Reading order: `compile` (formulas to tapes), `system` (tapes as the march sees them), `probes` (result
//! functions), `known` (instants known before the run), this file.

use crate::float;
use crate::march::{
    self, ChoiceError, Grid, GridError, Method, Outcome, Plan, Probe, RowKind, StopReason,
};
use crate::problem::model::{Case, Expression, GridSpec, Model};

pub use self::compile::Compiled;
pub use self::following::StepVisitor;
pub use self::system::CaseSystem;
pub use self::trouble::{Cause, Trouble};

mod balance;
mod compile;
mod following;
mod known;
mod probes;
mod system;
mod trouble;

/// One march of one case at one level of the ladder; everything in SI.
#[derive(Clone, Debug)]
pub struct Solution {
    /// In the order of the model's results; none where a result has no value because its event never came.
    pub results: Vec<Option<f64>>,
    pub outcome: Outcome,
    pub rows: Vec<HistoryRow>,
    /// For each result read off among the first steps, one for each state: how many had begun by then.
    pub steps_begun: Vec<Option<usize>>,
    /// Why a value was not finite, where that ended the march.
    pub trouble: Option<Trouble>,
}

/// Where a step of the march starts, how long it is, and which switches hold in it.
#[derive(Clone, Debug)]
pub struct StepToShow {
    pub t: f64,
    pub y: Vec<f64>,
    pub h: f64,
    switches: Vec<f64>,
}

/// A step with every intermediate, and the quantities at each stage.
#[derive(Clone, Debug)]
pub struct WorkedStep {
    pub trace: march::Trace,
    pub quantities: Vec<Vec<f64>>,
}

/// What an integrator has read off: values of the probes, states and quadratures at its end, and the end.
#[derive(Clone, Debug)]
pub struct Reading {
    pub probes: Vec<Option<f64>>,
    pub y: Vec<f64>,
    pub at: f64,
}

/// States, switches aside, and quantities at one instant.
#[derive(Clone, Debug)]
pub struct HistoryRow {
    pub t: f64,
    pub states: Vec<f64>,
    pub quantities: Vec<f64>,
    pub kind: RowKind,
    /// Whether the row stands in the printed history and the CSV file; the others only draw curves.
    pub printed: bool,
}

/// Why a case cannot be marched at all.
#[derive(Clone, Debug, PartialEq)]
pub enum Unsolvable {
    /// An initial value, limit or end is not finite.
    NotFinite {
        what: String,
    },
    Grid(GridError),
    /// No grid meets the tolerance.
    Choice(ChoiceError),
}

/// A case laid out for marching: its inputs in place, its grid, its instants of print.
pub struct Prepared<'a> {
    compiled: &'a Compiled,
    system: CaseSystem<'a>,
    /// The same equations once more, to look at while the march has the others in hand.
    beside: CaseSystem<'a>,
    /// Index into the model's cases.
    case: usize,
    pub method: &'static Method,
    pub grid: Grid,
    /// Title of the pair whose error estimate chose the grid, where one did.
    pub chosen_by: Option<&'static str>,
    pub from: f64,
    pub to: f64,
    /// Instants of the printed history.
    print_times: Vec<f64>,
    plan: Plan,
    /// Limits of the criteria, in SI, in the order of the model's criteria: one or two each.
    pub limits: Vec<Vec<f64>>,
    /// Initial values of the states.
    pub initial: Vec<f64>,
    /// Value of every input.
    pub inputs: Vec<f64>,
}

/// Lays out the case with this index.
///
/// # Errors
/// A value that is not finite, or a grid that cannot be laid out.
pub fn prepare<'a>(
    model: &Model,
    compiled: &'a Compiled,
    index: usize,
) -> Result<Prepared<'a>, Unsolvable> {
    let case: &Case = &model.cases[index];
    let finite = |value: f64, what: &str| {
        if value.is_finite() {
            Ok(value)
        } else {
            Err(Unsolvable::NotFinite {
                what: what.to_owned(),
            })
        }
    };
    let value = |expression: &Expression| compiled.of_inputs(expression, &case.values);
    let from = finite(value(&model.march.from), "the start of the span")?;
    let to = finite(value(&model.march.to), "the end of the span")?;
    let mut initial = Vec::new();
    for state in &model.states {
        initial.push(finite(
            value(&state.initial),
            &format!("the initial value of {}", state.symbol),
        )?);
    }
    let mut limits = Vec::new();
    for criterion in &model.criteria {
        let values: Vec<f64> = criterion
            .limit
            .expressions()
            .into_iter()
            .map(value)
            .collect();
        for limit in &values {
            finite(*limit, &format!("the limit of {}", criterion.id))?;
        }
        limits.push(values);
    }
    let ranges = model
        .states
        .iter()
        .map(|state| {
            state
                .within
                .as_ref()
                .map(|(low, high)| (value(low), value(high)))
        })
        .collect();
    let method = march::method(&model.march.method).unwrap_or(march::METHODS[0]);
    let mut system = CaseSystem::new(model, compiled, case);
    let known = known::instants(model, &mut system, case, from, to);
    let print_times = print_times(model, from, to);
    let mut y0 = initial.clone();
    y0.resize(initial.len() + compiled.quadratures(), 0.0);
    let plan = Plan {
        y0,
        events: compiled.event_rules.clone(),
        breaks: compiled.breaks.clone(),
        kinks: compiled.kinks.clone(),
        ranges,
        report_times: with_curve_times(&print_times, &known, from, to),
        report: compiled.report_observables.clone(),
        scales: model.states.iter().map(|state| state.scale).collect(),
        ..Plan::default()
    };
    let (grid, chosen_by) = match model.march.grid {
        GridSpec::Chosen { tolerance } => {
            let choice =
                march::choose_grid(&mut system, method, (from, to), &known, tolerance, &plan)
                    .map_err(Unsolvable::Choice)?;
            (choice.grid, Some(choice.pair))
        }
        _ => (
            stated_grid(model, from, to)
                .map_err(Unsolvable::Grid)?
                .with_known(&known),
            None,
        ),
    };
    let beside = CaseSystem::new(model, compiled, case);
    Ok(Prepared {
        compiled,
        system,
        beside,
        case: index,
        method,
        grid,
        chosen_by,
        from,
        to,
        print_times,
        plan,
        limits,
        initial,
        inputs: case.values.clone(),
    })
}

/// The grid that the problem file states.
fn stated_grid(model: &Model, from: f64, to: f64) -> Result<Grid, GridError> {
    match &model.march.grid {
        GridSpec::Step { value_si, .. } => Grid::uniform(from, to, *value_si),
        GridSpec::Segments(segments) => {
            let specs: Vec<march::SegmentSpec> = segments
                .iter()
                .map(|segment| march::SegmentSpec {
                    to: segment.to_si,
                    step: segment.step_si,
                })
                .collect();
            Grid::segmented(from, &specs)
        }
        // Chosen grids are made by `choose_grid`.
        GridSpec::Chosen { .. } => Grid::uniform(from, to, (to - from).abs()),
    }
}

/// Most rows of a printed history.
pub const MAX_REPORT_ROWS: f64 = 5_000.0;

/// Instants of print: start, multiples of the spacing, end.
fn print_times(model: &Model, from: f64, to: f64) -> Vec<f64> {
    let span = (to - from).abs();
    let spacing = model.march.report_every.unwrap_or_else(|| {
        model
            .march
            .unit
            .difference_to_si(nice_spacing(model.march.unit.difference_from_si(span)))
    });
    let count = (span / spacing).min(MAX_REPORT_ROWS);
    let direction = if to < from { -1.0 } else { 1.0 };
    let whole = (count + 1e-9).floor();
    let mut times: Vec<f64> = (0..=whole as u64)
        .map(|k| from + direction * k as f64 * spacing)
        .collect();
    match times.last_mut() {
        // The end itself, not a sum that misses it by a rounding.
        Some(last) if (*last - to).abs() <= 1e-9 * spacing => *last = to,
        _ => times.push(to),
    }
    times
}

/// Points of a curve that a figure draws.
const CURVE_POINTS: usize = 240;

/// The printed instants, known instants, and enough others between them for smooth curves.
fn with_curve_times(print_times: &[f64], known: &[f64], from: f64, to: f64) -> Vec<f64> {
    let mut times: Vec<f64> = (1..CURVE_POINTS)
        .map(|k| from + (to - from) * k as f64 / CURVE_POINTS as f64)
        .collect();
    times.extend(known.iter().take(CURVE_POINTS));
    // A curve point that is a printed instant but for rounding would be a second row at the same time.
    let near = 1e-9 * (to - from).abs();
    times.retain(|time| print_times.iter().all(|print| (print - time).abs() > near));
    times.extend(print_times);
    times.sort_by(|a, b| {
        if from < to {
            a.total_cmp(b)
        } else {
            b.total_cmp(a)
        }
    });
    times.dedup_by(|a, b| (*a - *b).abs() <= near && !print_times.contains(a));
    times
}

/// A spacing of 1, 2 or 5 times a power of ten that gives ten to thirty rows.
fn nice_spacing(span: f64) -> f64 {
    let target = span / 20.0;
    let mut power = 1.0;
    while power * 10.0 <= target {
        power *= 10.0;
    }
    while power > target {
        power /= 10.0;
    }
    [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .map(|digit| digit * power)
        .find(|spacing| *spacing >= target)
        .unwrap_or(10.0 * power)
}

/// Marches a prepared case at `level`: every interval of the grid divided by 2^level.
pub fn solve(model: &Model, prepared: &mut Prepared, level: u32) -> Solution {
    let compiled = prepared.compiled;
    let mut values: Vec<Option<Option<f64>>> = vec![None; compiled.probes.len()];
    let mut first: Option<Outcome> = None;
    // Where on the march each probe was read, for those that are read at one place.
    let mut instants: Vec<Option<f64>> = vec![None; compiled.probes.len()];
    // Instants that depend on other probes are known only after a march; each pass resolves what it can.
    loop {
        let (mut plan, asked) = prepared.next_plan(&values);
        for (index, probe) in asked.iter().zip(&plan.probes) {
            instants[*index] = compiled.probes[*index].fixed_instant(probe);
        }
        let companions: Vec<(usize, Probe)> = asked
            .iter()
            .filter_map(|index| Some((*index, compiled.probes[*index].companion()?)))
            .collect();
        plan.probes
            .extend(companions.iter().map(|(_, probe)| *probe));
        if asked.is_empty() && first.is_some() {
            break;
        }
        if first.is_some() {
            plan.report_times.clear();
        }
        let outcome = march::march(
            &mut prepared.system,
            prepared.method,
            &prepared.grid,
            level,
            &plan,
        );
        for (index, value) in asked.iter().zip(&outcome.probes) {
            values[*index] = Some(*value);
        }
        for ((index, _), at) in companions.iter().zip(&outcome.probes[asked.len()..]) {
            instants[*index] = *at;
        }
        if first.is_none() {
            compiled.read_quadratures(&outcome.y, outcome.stop.at, prepared.from, &mut values);
            first = Some(outcome);
        }
    }
    let outcome = first.unwrap_or_else(|| {
        march::march(
            &mut prepared.system,
            prepared.method,
            &prepared.grid,
            level,
            &prepared.plan,
        )
    });
    for (instant, probe) in instants.iter_mut().zip(&compiled.probes) {
        *instant = instant.or_else(|| probe.event_instant(&outcome));
    }
    // As many as it takes for the first state to be felt by the last of a chain.
    let ends: Vec<f64> = prepared
        .grid
        .intervals(level)
        .take(model.states.len().max(1))
        .map(|interval| interval.end)
        .collect();
    let steps_begun = compiled.steps_begun(&instants, prepared.from, &ends);
    let results = compiled.results(&prepared.inputs, &values);
    let rows = outcome
        .rows
        .iter()
        .map(|row| HistoryRow {
            t: row.t,
            states: row.y[..model.states.len()].to_vec(),
            quantities: row.observables.clone(),
            kind: row.kind,
            printed: row.kind != RowKind::Report || prepared.print_times.contains(&row.t),
        })
        .collect();
    let trouble = match outcome.stop.reason {
        StopReason::NotFinite { .. } => prepared.find_trouble(model, &outcome),
        _ => None,
    };
    Solution {
        results,
        outcome,
        rows,
        steps_begun,
        trouble,
    }
}

impl Solution {
    /// Whether the march came to an end that was meant.
    pub fn is_complete(&self) -> bool {
        matches!(
            self.outcome.stop.reason,
            StopReason::EndOfSpan | StopReason::Event(_)
        )
    }
}

impl<'a> Prepared<'a> {
    /// Marches `level` once more and shows every step, with the equations as they hold in it.
    pub fn follow(&mut self, level: u32, visit: &mut StepVisitor) {
        let plan = Plan {
            report_times: Vec::new(),
            ..self.plan.clone()
        };
        following::follow(
            &mut self.system,
            &mut self.beside,
            (self.method, &self.grid, level),
            &plan,
            visit,
        );
    }

    /// Whether a balance holds to round-off for any step, because it is linear in what is marched.
    pub fn balance_is_linear(&self, balance: usize) -> bool {
        self.compiled.balances[balance].is_linear
    }

    /// Value of a closed form: one of inputs, or one of the variable at `t`.
    pub fn closed_form(&mut self, model: &Model, index: usize, t: f64) -> f64 {
        match self.compiled.closed_forms[index] {
            Some(observable) => {
                march::System::observe(&mut self.system, observable, t, &self.plan.y0)
            }
            None => compile::of_inputs(
                &model.closed_forms[index].formula.tree,
                &self.compiled.input_names(),
                &self.inputs,
            ),
        }
    }

    /// Values of the results as another integrator finds them: `run` gets the equations and what to look for.
    ///
    /// # Errors
    /// The first that `run` gives.
    pub fn results_by<E>(
        &mut self,
        mut run: impl FnMut(&mut CaseSystem<'a>, &Plan) -> Result<Reading, E>,
    ) -> Result<Vec<Option<f64>>, E> {
        let compiled = self.compiled;
        let mut values: Vec<Option<Option<f64>>> = vec![None; compiled.probes.len()];
        let mut is_first = true;
        loop {
            let (plan, asked) = self.next_plan(&values);
            if asked.is_empty() && !is_first {
                return Ok(compiled.results(&self.inputs, &values));
            }
            let reading = run(&mut self.system, &plan)?;
            for (index, value) in asked.iter().zip(&reading.probes) {
                values[*index] = Some(*value);
            }
            if std::mem::take(&mut is_first) {
                compiled.read_quadratures(&reading.y, reading.at, self.from, &mut values);
            }
        }
    }

    /// A plan that asks for every probe that can be asked by now, and which ones these are.
    fn next_plan(&self, values: &[Option<Option<f64>>]) -> (Plan, Vec<usize>) {
        let mut plan = self.plan.clone();
        let mut asked = Vec::new();
        for (index, probe) in self
            .compiled
            .probes
            .iter()
            .enumerate()
            .filter(|(index, _)| values[*index].is_none())
        {
            if let Some(probe) = probe.for_march(&self.inputs, values) {
                asked.push(index);
                plan.probes.push(probe);
            }
        }
        (plan, asked)
    }
}

impl Prepared<'_> {
    /// A step with every intermediate, and the quantities at each of its stages, for the calculator check; none where
    /// a slope is not finite.
    pub fn worked(&mut self, step: &StepToShow) -> Option<WorkedStep> {
        use crate::march::System as _;
        let before = self.system.switches();
        self.system.restore(&step.switches);
        let trace = march::trace_step(&mut self.system, self.method, step.t, &step.y, step.h);
        let worked = trace.map(|trace| {
            let quantities = trace
                .stages
                .iter()
                .map(|stage| self.quantities_at(stage.t, &stage.y))
                .collect();
            WorkedStep { trace, quantities }
        });
        self.system.restore(&before);
        worked
    }

    fn find_trouble(&mut self, model: &Model, outcome: &Outcome) -> Option<Trouble> {
        let case = model.cases.get(self.case)?;
        let mut slope = vec![0.0; outcome.y.len()];
        march::System::rate(&mut self.system, outcome.stop.at, &outcome.y, &mut slope);
        let scene = trouble::Scene {
            model,
            case,
            tables: self.system.tables(),
            switches: &outcome.switches,
        };
        let states = model.states.len();
        let direction = if self.to < self.from { -1.0 } else { 1.0 };
        trouble::find(
            &scene,
            outcome.stop.at,
            &outcome.y[..states],
            &slope[..states],
            direction * self.grid.longest_step(),
        )
    }

    /// Values of all quantities at an instant.
    fn quantities_at(&mut self, t: f64, y: &[f64]) -> Vec<f64> {
        use crate::march::System as _;
        let list = &self.compiled.report_observables;
        list.iter()
            .map(|observable| self.system.observe(*observable, t, y))
            .collect()
    }

    /// The first step, and the step at whose start the largest rate stands, states scaled by `scale`.
    pub fn steps_to_show(&mut self, scale: &[f64]) -> Vec<StepToShow> {
        use crate::march::System as _;
        let mut first: Option<StepToShow> = None;
        let mut steepest: Option<(f64, StepToShow)> = None;
        self.follow(0, &mut |step, system| {
            let shown = || StepToShow {
                t: step.t,
                y: step.y.to_vec(),
                h: step.end - step.t,
                switches: system.switches(),
            };
            let sizes = step.slope.iter().zip(scale).map(|(slope, scale)| {
                if *scale > 0.0 {
                    (slope / scale).abs()
                } else {
                    0.0
                }
            });
            let size = sizes.fold(0.0, float::max);
            if steepest.as_ref().is_none_or(|(largest, _)| size > *largest) {
                steepest = Some((size, shown()));
            }
            first.get_or_insert_with(shown);
        });
        let steepest = steepest.map(|(_, step)| step);
        let other = steepest.filter(|step| first.as_ref().is_some_and(|first| first.t != step.t));
        first.into_iter().chain(other).collect()
    }
}
