//! Data files for machines: results.json, evidence.json, history CSV. Shortest decimals that read back.

use serde::Serialize;

use super::Subject;
use crate::evidence::alternate::TOLERANCE;
use crate::evidence::{
    Alternate, At, BalanceEvidence, CaseEvidence, ClosedFormEvidence, Comparison, Curve, Ladder,
    Stability,
};
use crate::float;
use crate::march::{RowKind, StopReason};
use crate::problem::model::{Checked, Model};
use crate::record::words;
use crate::units::Unit;

#[derive(Serialize)]
struct Results<'a> {
    format: u32,
    program: Program,
    inputs_sha256: &'a str,
    finding: &'static str,
    cases: Vec<Case<'a>>,
}

#[derive(Serialize)]
struct Program {
    name: &'static str,
    version: &'static str,
}

#[derive(Serialize)]
struct Case<'a> {
    id: &'a str,
    results: Vec<CaseResult<'a>>,
    criteria: Vec<CaseCriterion<'a>>,
    stop: Stop<'a>,
}

#[derive(Serialize)]
struct CaseResult<'a> {
    symbol: &'a str,
    unit: &'a str,
    value: Option<f64>,
    numerical_uncertainty: Option<f64>,
    extrapolated: Option<f64>,
    observed_order: Option<f64>,
    formal_order: u32,
    convergence: &'static str,
    input_interval: Option<[f64; 2]>,
    band: Option<[f64; 2]>,
    coverage: Option<f64>,
    alternate: Option<&'static str>,
    absent: bool,
}

#[derive(Serialize)]
struct CaseCriterion<'a> {
    id: &'a str,
    finding: &'static str,
    margin: Option<f64>,
    margin_of_band: Option<f64>,
    unit: String,
}

#[derive(Serialize)]
struct Stop<'a> {
    reason: &'static str,
    at: Option<f64>,
    unit: &'a str,
}

/// `results/results.json`, as `problem-format` documents it.
pub fn results_json(subject: &Subject, inputs_sha256: &str) -> String {
    let model = subject.model;
    let results = Results {
        format: 1,
        program: Program {
            name: env!("CARGO_PKG_NAME"),
            version: env!("CARGO_PKG_VERSION"),
        },
        inputs_sha256,
        finding: subject.verdict.overall.word(),
        cases: subject
            .cases
            .iter()
            .map(|case| case_json(subject, model, case))
            .collect(),
    };
    pretty(&results)
}

fn pretty<T: Serialize>(value: &T) -> String {
    // A tree of strings and floats always serialises; non-finite floats become null.
    serde_json::to_string_pretty(value).unwrap_or_default() + "\n"
}

fn finite(value: Option<f64>) -> Option<f64> {
    value.filter(|value| value.is_finite())
}

fn case_json<'a>(subject: &Subject, model: &'a Model, case: &CaseEvidence) -> Case<'a> {
    let results = model
        .results
        .iter()
        .zip(&case.results)
        .zip(&case.alternate.results)
        .map(|((spec, evidence), comparison)| {
            let ladder = &evidence.ladder;
            let value = ladder.reported();
            let number = |value: Option<f64>| {
                finite(value.map(|value| words::in_unit(model, value, &spec.unit)))
            };
            let band = value
                .zip(ladder.uncertainty)
                .map(|(value, uncertainty)| [value - uncertainty, value + uncertainty]);
            CaseResult {
                symbol: &spec.symbol,
                unit: spec.unit.text(),
                value: number(value),
                numerical_uncertainty: finite(
                    ladder
                        .uncertainty
                        .map(|uncertainty| spec.unit.difference_from_si(uncertainty)),
                ),
                extrapolated: number(ladder.extrapolated),
                observed_order: finite(ladder.observed_order),
                formal_order: case.method.order,
                convergence: ladder.convergence.word(),
                input_interval: None,
                band: band.and_then(|[low, high]| Some([number(Some(low))?, number(Some(high))?])),
                coverage: None,
                alternate: Some(comparison.word()),
                absent: ladder.is_absent(),
            }
        });
    let criteria = subject
        .verdict
        .judgements
        .iter()
        .filter(|judgement| judgement.case == case.case)
        .map(|judgement| {
            let criterion = &model.criteria[judgement.criterion];
            let unit = &model.results[criterion.result].unit;
            let difference = |value: Option<f64>| {
                finite(value.map(|value| words::difference_in_unit(value, unit)))
            };
            CaseCriterion {
                id: &criterion.id,
                finding: judgement.finding.word(),
                margin: difference(judgement.margin),
                margin_of_band: difference(judgement.margin_of_band),
                unit: unit.difference_unit().text().to_owned(),
            }
        });
    let stop = case.reported().outcome.stop;
    Case {
        id: &model.cases[case.case].id,
        results: results.collect(),
        criteria: criteria.collect(),
        stop: Stop {
            reason: stop_word(stop.reason),
            at: finite(Some(words::in_unit(model, stop.at, &model.march.unit))),
            unit: model.march.unit.text(),
        },
    }
}

fn stop_word(reason: StopReason) -> &'static str {
    match reason {
        StopReason::EndOfSpan => "end of span",
        StopReason::Event(_) => "event",
        StopReason::TrueAtStart { .. } => "condition true at start",
        StopReason::LeftRange { .. } => "left range",
        StopReason::NotFinite { .. } => "not finite",
        StopReason::Chattering { .. } => "chattering",
        StopReason::NewtonFailed { .. } => "newton failed",
        StopReason::CorrectorFailed { .. } => "corrector failed",
        StopReason::TooManySteps { .. } => "too many steps",
    }
}

#[derive(Serialize)]
struct EvidenceFile<'a> {
    format: u32,
    cases: Vec<EvidenceCase<'a>>,
}

#[derive(Serialize)]
struct EvidenceCase<'a> {
    id: &'a str,
    method: &'static str,
    steps: u64,
    slope_evaluations: Vec<u64>,
    ladders: Vec<LadderFile<'a>>,
    stability: StabilityFile,
    alternate: AlternateFile<'a>,
    cost_of_accuracy: Vec<CurveFile>,
    balances: Vec<BalanceFile<'a>>,
    closed_forms: Vec<ClosedFormFile<'a>>,
}

#[derive(Serialize)]
struct AlternateFile<'a> {
    family: &'static str,
    relative_tolerance: f64,
    failure: Option<&'a str>,
    results: Vec<ComparisonFile<'a>>,
}

#[derive(Serialize)]
struct ComparisonFile<'a> {
    symbol: &'a str,
    finding: &'static str,
    /// The difference is no larger than this, in the unit of differences of the result; none: beyond 10 U.
    bound: Option<f64>,
}

#[derive(Serialize)]
struct CurveFile {
    method: &'static str,
    slope_evaluations: Vec<u64>,
    /// Relative to the scale of the result.
    errors: Vec<f64>,
}

/// In SI units.
#[derive(Serialize)]
struct StabilityFile {
    steps: u64,
    steps_taken: u64,
    unstable: bool,
    bound_only: bool,
    stiff: bool,
    largest_growth_factor: Option<f64>,
    largest_growth_in_a_run: Option<f64>,
    largest_stable_step: Option<f64>,
    stiffness_ratio: Option<f64>,
    largest_eigenvalue: Option<f64>,
    /// Most negative growth factor of a fast decaying mode.
    ringing: Option<f64>,
    not_evaluated_steps: u64,
    /// h·λ as real and imaginary part.
    points: Vec<[Option<f64>; 2]>,
}

#[derive(Serialize)]
struct BalanceFile<'a> {
    id: &'a str,
    /// Holds to round-off for any step: no numerical evidence.
    linear: bool,
    /// Largest change at step, step/2, step/4 … in SI.
    drift: Vec<Option<f64>>,
    largest_term: Option<f64>,
    relative_drift: Option<f64>,
    tolerance: f64,
    observed_order: Option<f64>,
    within: bool,
}

#[derive(Serialize)]
struct ClosedFormFile<'a> {
    /// Symbol of the result or state.
    of: &'a str,
    kind: &'static str,
    /// In SI.
    expected: Option<f64>,
    found: Option<f64>,
    relative_difference: Option<f64>,
    tolerance: f64,
    within: bool,
}

#[derive(Serialize)]
struct LadderFile<'a> {
    symbol: &'a str,
    unit: &'a str,
    /// Value at step, step/2, step/4 …
    values: Vec<Option<f64>>,
    factor_of_safety: Option<f64>,
    cause: Option<&'a str>,
}

/// `results/evidence.json`: every level's value of every result.
pub fn evidence_json(subject: &Subject) -> String {
    let model = subject.model;
    let cases = subject.cases.iter().map(|case| EvidenceCase {
        id: &model.cases[case.case].id,
        method: case.method.name,
        steps: case.steps,
        slope_evaluations: case
            .levels
            .iter()
            .map(|level| level.outcome.rate_evaluations)
            .collect(),
        ladders: model
            .results
            .iter()
            .zip(&case.results)
            .map(|(spec, evidence)| {
                ladder_file(
                    model,
                    &spec.symbol,
                    &spec.unit,
                    &evidence.ladder,
                    evidence.cause.as_deref(),
                )
            })
            .collect(),
        stability: stability_file(&case.stability),
        alternate: alternate_file(model, &case.alternate),
        cost_of_accuracy: case
            .cost
            .iter()
            .flat_map(|cost| &cost.curves)
            .map(curve_file)
            .collect(),
        balances: case
            .balances
            .iter()
            .map(|balance| balance_file(model, balance))
            .collect(),
        closed_forms: case
            .closed_forms
            .iter()
            .map(|form| closed_form_file(model, form))
            .collect(),
    });
    pretty(&EvidenceFile {
        format: 1,
        cases: cases.collect(),
    })
}

fn alternate_file<'a>(model: &'a Model, alternate: &'a Alternate) -> AlternateFile<'a> {
    let results = model
        .results
        .iter()
        .zip(&alternate.results)
        .map(|(spec, comparison)| {
            let bound = match *comparison {
                Comparison::Agrees { bound } => Some(bound),
                Comparison::Disagrees { bound } => bound,
                Comparison::NotCompared => None,
            };
            ComparisonFile {
                symbol: &spec.symbol,
                finding: comparison.word(),
                bound: finite(bound.map(|bound| words::difference_in_unit(bound, &spec.unit))),
            }
        });
    AlternateFile {
        family: alternate.family,
        relative_tolerance: TOLERANCE,
        failure: alternate.failure.as_deref(),
        results: results.collect(),
    }
}

fn curve_file(curve: &Curve) -> CurveFile {
    CurveFile {
        method: curve.method.name,
        slope_evaluations: curve
            .points
            .iter()
            .map(|(evaluations, _)| *evaluations)
            .collect(),
        errors: curve.points.iter().map(|(_, error)| *error).collect(),
    }
}

fn stability_file(stability: &Stability) -> StabilityFile {
    let value = |at: Option<At>| finite(at.map(|at| at.value));
    StabilityFile {
        steps: stability.steps,
        steps_taken: stability.taken,
        unstable: stability.is_unstable(),
        bound_only: stability.is_bound,
        stiff: stability.is_stiff,
        largest_growth_factor: value(stability.largest_growth),
        largest_growth_in_a_run: finite(stability.run.map(|run| run.growth)),
        largest_stable_step: value(stability.largest_stable_step),
        stiffness_ratio: value(stability.stiffness),
        largest_eigenvalue: value(stability.fastest),
        ringing: value(stability.ringing),
        not_evaluated_steps: stability.not_evaluated_count,
        points: stability
            .points
            .iter()
            .map(|(re, im)| [finite(Some(*re)), finite(Some(*im))])
            .collect(),
    }
}

fn balance_file<'a>(model: &'a Model, balance: &BalanceEvidence) -> BalanceFile<'a> {
    let spec = &model.balances[balance.balance];
    BalanceFile {
        id: &spec.id,
        linear: balance.is_linear,
        drift: balance
            .drifts
            .iter()
            .map(|drift| finite(Some(*drift)))
            .collect(),
        largest_term: finite(Some(balance.scale)),
        relative_drift: finite(Some(balance.relative())),
        tolerance: spec.tolerance,
        observed_order: finite(
            balance
                .ladder
                .as_ref()
                .and_then(|ladder| ladder.observed_order),
        ),
        within: balance.holds,
    }
}

fn closed_form_file<'a>(model: &'a Model, form: &ClosedFormEvidence) -> ClosedFormFile<'a> {
    let spec = &model.closed_forms[form.closed_form];
    ClosedFormFile {
        of: match spec.checked {
            Checked::Result(index) => &model.results[index].symbol,
            Checked::State(index) => &model.states[index].symbol,
        },
        kind: if spec.is_exact { "exact" } else { "estimate" },
        expected: finite(Some(form.expected)),
        found: finite(form.found),
        relative_difference: finite(form.difference),
        tolerance: spec.tolerance,
        within: form.holds,
    }
}

fn ladder_file<'a>(
    model: &Model,
    symbol: &'a str,
    unit: &'a Unit,
    ladder: &Ladder,
    cause: Option<&'a str>,
) -> LadderFile<'a> {
    let values = ladder
        .values
        .iter()
        .map(|value| finite(value.map(|value| words::in_unit(model, value, unit))))
        .collect();
    LadderFile {
        symbol,
        unit: unit.text(),
        values,
        factor_of_safety: ladder.factor,
        cause,
    }
}

/// `results/history-<case>.csv` (RFC 4180): variable, states, quantities with units in the header, and why there is a row.
pub fn history_csv(subject: &Subject, case: &CaseEvidence) -> String {
    let model = subject.model;
    let mut columns: Vec<(&str, &Unit)> = vec![(&model.march.variable, &model.march.unit)];
    columns.extend(
        model
            .states
            .iter()
            .map(|state| (state.symbol.as_str(), &state.unit)),
    );
    columns.extend(
        model
            .quantities
            .iter()
            .map(|quantity| (quantity.symbol.as_str(), &quantity.unit)),
    );
    let mut lines = columns
        .iter()
        .map(|(name, unit)| format!("{name} [{}]", unit.text()))
        .collect::<Vec<_>>()
        .join(",");
    lines.push_str(",row\r\n");
    for row in case.reported().rows.iter().filter(|row| row.printed) {
        let values = std::iter::once(row.t)
            .chain(row.states.iter().copied())
            .chain(row.quantities.iter().copied());
        for (value, (_, unit)) in values.zip(&columns) {
            lines.push_str(&float::shortest(words::in_unit(model, value, unit)));
            lines.push(',');
        }
        lines.push_str(match row.kind {
            RowKind::Report => "report",
            RowKind::Event => "event",
            RowKind::AfterSet => "after set",
            RowKind::Stop => "stop",
        });
        lines.push_str("\r\n");
    }
    lines
}

/// A case's id as part of a file name; a number follows where two ids would give the same.
pub fn case_stem(model: &Model, case: usize) -> String {
    let stem = stem_of(&model.cases[case].id);
    let earlier = model.cases[..case]
        .iter()
        .filter(|other| stem_of(&other.id) == stem)
        .count();
    if earlier == 0 {
        stem
    } else {
        format!("{stem}-{}", earlier + 1)
    }
}

fn stem_of(id: &str) -> String {
    let mut stem = String::new();
    for character in id.chars() {
        if character.is_ascii_alphanumeric() {
            stem.push(character.to_ascii_lowercase());
        } else if !stem.ends_with('-') && !stem.is_empty() {
            stem.push('-');
        }
    }
    let stem = stem.trim_end_matches('-');
    if stem.is_empty() {
        "case".to_owned()
    } else {
        stem.to_owned()
    }
}
