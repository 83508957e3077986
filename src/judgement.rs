//! Judgement: a value and its band against a limit; the finding of the whole.
//!
//! Owns: the rules of findings. Does not own: how a band came about (`evidence`).

use crate::evidence::{CaseEvidence, Comparison, Convergence, advice, stop_sentence};
use crate::float::Numeral;
use crate::problem::model::{AssumptionStanding, Checked, Limit, Model};

/// What is found of a criterion. What is not resolved never counts as met.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Finding {
    Met,
    NotResolved,
    NotMet,
}

impl Finding {
    pub fn word(self) -> &'static str {
        match self {
            Finding::Met => "met",
            Finding::NotResolved => "not resolved",
            Finding::NotMet => "not met",
        }
    }
}

/// A criterion judged in one case; everything in SI.
#[derive(Clone, Debug)]
pub struct Judgement {
    pub criterion: usize,
    /// Index into the model's cases.
    pub case: usize,
    pub value: Option<f64>,
    /// [value − U, value + U]; none where no band is claimed.
    pub band: Option<(f64, f64)>,
    /// Distance of the value inside the limit; negative outside.
    pub margin: Option<f64>,
    /// Distance of the nearer band edge inside the limit; negative where the band reaches beyond.
    pub margin_of_band: Option<f64>,
    pub finding: Finding,
    /// Why, where the numbers do not say it.
    pub reason: Option<String>,
}

/// What the calculation as a whole has found.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Overall {
    Supported,
    SupportedWithHolds,
    NotSupported,
}

impl Overall {
    pub fn word(self) -> &'static str {
        match self {
            Overall::Supported => "supported",
            Overall::SupportedWithHolds => "supported with holds",
            Overall::NotSupported => "not supported",
        }
    }
}

/// All judgements, criterion by criterion and in each case by case.
#[derive(Clone, Debug)]
pub struct Verdict {
    pub judgements: Vec<Judgement>,
    pub overall: Overall,
    /// What the evidence beside the ladders speaks against, as sentences: each makes the whole not supported.
    pub against: Vec<String>,
    /// Alternate integrations that failed, as sentences: they make a supported whole one with holds.
    pub failed: Vec<String>,
    /// Reasons against, in order of weight; empty when supported.
    pub shortfalls: Vec<String>,
}

impl Verdict {
    /// The judgement that governs `criterion`: the worst finding, then the smallest margin of band.
    pub fn governing(&self, criterion: usize) -> Option<&Judgement> {
        self.judgements
            .iter()
            .filter(|judgement| judgement.criterion == criterion)
            .min_by(|a, b| {
                let margin = |judgement: &Judgement| {
                    judgement
                        .margin_of_band
                        .or(judgement.margin)
                        .unwrap_or(f64::INFINITY)
                };
                b.finding
                    .cmp(&a.finding)
                    .then(margin(a).total_cmp(&margin(b)))
            })
    }

    /// The finding over all cases of `criterion`.
    pub fn finding(&self, criterion: usize) -> Finding {
        self.governing(criterion)
            .map_or(Finding::NotResolved, |judgement| judgement.finding)
    }
}

/// Judges every criterion in each of its cases.
pub fn judge(model: &Model, cases: &[CaseEvidence]) -> Verdict {
    let mut judgements = Vec::new();
    for (index, criterion) in model.criteria.iter().enumerate() {
        for case in &criterion.cases {
            judgements.push(judge_one(model, index, &cases[*case]));
        }
    }
    let mut shortfalls = Vec::new();
    for (index, criterion) in model.criteria.iter().enumerate() {
        let worst = judgements
            .iter()
            .filter(|judgement| judgement.criterion == index)
            .map(|judgement| judgement.finding)
            .max();
        match worst {
            Some(Finding::NotMet) => {
                shortfalls.push(format!("Criterion {} is not met.", criterion.id))
            }
            Some(Finding::NotResolved) | None => {
                shortfalls.push(format!("Criterion {} is not resolved.", criterion.id))
            }
            Some(Finding::Met) => {}
        }
    }
    // Without criteria nobody else would notice that there is no solution.
    if model.criteria.is_empty() {
        let failed = cases.iter().filter(|case| !case.reported().is_complete());
        shortfalls.extend(failed.map(|case| {
            format!(
                "The march of case “{}” ended early: {}.",
                model.cases[case.case].id,
                stop_sentence(model, case.reported())
            )
        }));
    }
    let against = against(model, cases);
    shortfalls.extend(against.iter().cloned());
    let is_open = |standing: &AssumptionStanding| *standing == AssumptionStanding::ToBeConfirmed;
    let open: Vec<&str> = model
        .assumptions
        .iter()
        .filter(|assumption| is_open(&assumption.standing))
        .map(|assumption| assumption.id.as_str())
        .collect();
    let failed = failed_alternates(model, cases);
    let overall = if !shortfalls.is_empty() {
        Overall::NotSupported
    } else if !open.is_empty() || !failed.is_empty() {
        Overall::SupportedWithHolds
    } else {
        Overall::Supported
    };
    shortfalls.extend(failed.iter().cloned());
    if !open.is_empty() {
        shortfalls.push(format!("To be confirmed: {}.", open.join(", ")));
    }
    Verdict {
        judgements,
        overall,
        against,
        failed,
        shortfalls,
    }
}

/// Unstable marches, balances and closed forms outside their tolerance.
fn against(model: &Model, cases: &[CaseEvidence]) -> Vec<String> {
    let mut sentences = Vec::new();
    for case in cases {
        let id = &model.cases[case.case].id;
        sentences.extend(advice::unstable(model, case));
        sentences.extend(disagreement(model, case));
        for balance in case.balances.iter().filter(|balance| !balance.holds) {
            let spec = &model.balances[balance.balance];
            let what = if balance.is_linear {
                "the written rates do not balance"
            } else {
                "it drifts with the march"
            };
            sentences.push(format!(
                "Balance {} in case “{id}” changes by {} of its largest term where {} are allowed: {what}.",
                spec.id,
                share(balance.relative()),
                share(spec.tolerance)
            ));
        }
        for form in case.closed_forms.iter().filter(|form| !form.holds) {
            let spec = &model.closed_forms[form.closed_form];
            let name = checked_name(model, spec.checked);
            let kind = if spec.is_exact {
                "exact closed form"
            } else {
                "estimate"
            };
            let words = match form.difference {
                Some(difference) => format!(
                    "{name} in case “{id}” differs from its {kind} by {}, where {} are allowed.",
                    share(difference),
                    share(spec.tolerance)
                ),
                None => format!("{name} in case “{id}” has no value to compare with its {kind}."),
            };
            sentences.push(words);
        }
    }
    sentences
}

/// Results used by a criterion of this case.
fn judged_results(model: &Model, case: usize) -> Vec<usize> {
    let mut list: Vec<usize> = model
        .criteria
        .iter()
        .filter(|criterion| criterion.cases.contains(&case))
        .map(|criterion| criterion.result)
        .collect();
    list.sort_unstable();
    list.dedup();
    list
}

/// Judged results on which the alternate integration disagrees.
fn disagreement(model: &Model, case: &CaseEvidence) -> Option<String> {
    let judged = judged_results(model, case.case);
    let differing: Vec<&str> = judged
        .into_iter()
        .filter(|result| {
            matches!(
                case.alternate.results[*result],
                Comparison::Disagrees { .. }
            )
        })
        .map(|result| model.results[result].symbol.as_str())
        .collect();
    let id = &model.cases[case.case].id;
    let cause = case
        .alternate
        .failure
        .as_ref()
        .map_or_else(String::new, |cause| format!(": {cause}"));
    (!differing.is_empty()).then(|| {
        format!(
            "The alternate integration of case “{id}” disagrees on {}{cause}.",
            differing.join(", ")
        )
    })
}

/// Cases whose alternate integration failed, though the march came to its end.
fn failed_alternates(model: &Model, cases: &[CaseEvidence]) -> Vec<String> {
    let failed = cases
        .iter()
        .filter(|case| case.reported().is_complete() && disagreement(model, case).is_none());
    failed
        .filter_map(|case| {
            let cause = case.alternate.failure.as_ref()?;
            Some(format!(
                "The alternate integration of case “{}” failed: {cause}.",
                model.cases[case.case].id
            ))
        })
        .collect()
}

/// Symbol of what a closed form checks.
fn checked_name(model: &Model, checked: Checked) -> &str {
    match checked {
        Checked::Result(index) => &model.results[index].symbol,
        Checked::State(index) => &model.states[index].symbol,
    }
}

/// A share of one, to two digits.
fn share(value: f64) -> String {
    Numeral::rounded_up(value, 2).typographic()
}

fn judge_one(model: &Model, index: usize, evidence: &CaseEvidence) -> Judgement {
    let criterion = &model.criteria[index];
    let result = &evidence.results[criterion.result];
    let ladder = &result.ladder;
    let value = ladder.reported();
    let empty = Judgement {
        criterion: index,
        case: evidence.case,
        value,
        band: None,
        margin: None,
        margin_of_band: None,
        finding: Finding::NotResolved,
        reason: None,
    };
    if ladder.convergence == Convergence::NotConverged {
        let cause = result
            .cause
            .clone()
            .unwrap_or_else(|| "differences between levels do not shrink".to_owned());
        return Judgement {
            reason: Some(format!("not converged: {cause}; {}", advice::NOT_CONVERGED)),
            ..empty
        };
    }
    let (Some(value), Some(uncertainty)) = (value, ladder.uncertainty) else {
        let symbol = &model.results[criterion.result].symbol;
        let (finding, reason) = match criterion.if_absent {
            Some(true) => (
                Finding::Met,
                format!("{symbol} has no value: its event did not occur"),
            ),
            Some(false) => (
                Finding::NotMet,
                format!("{symbol} has no value: its event did not occur"),
            ),
            None => (
                Finding::NotResolved,
                format!("{symbol} has no value, and `if_absent` does not say what that means"),
            ),
        };
        return Judgement {
            finding,
            reason: Some(reason),
            ..empty
        };
    };
    let limits = &evidence.limits[index];
    let inside = |x: f64| match (&criterion.limit, &limits[..]) {
        (Limit::AtMost(_), [limit]) => limit - x,
        (Limit::AtLeast(_), [limit]) => x - limit,
        (_, [low, high]) => crate::float::min(x - low, high - x),
        _ => f64::NAN,
    };
    let band = (value - uncertainty, value + uncertainty);
    let (margin, edges) = (inside(value), [inside(band.0), inside(band.1)]);
    let margin_of_band = crate::float::min(edges[0], edges[1]);
    let finding = if margin_of_band >= 0.0 {
        Finding::Met
    } else if is_outside(&criterion.limit, limits, band) {
        Finding::NotMet
    } else {
        Finding::NotResolved
    };
    let reason = (finding == Finding::NotResolved).then(|| {
        format!(
            "the band reaches over the limit; {}",
            advice::resolving(model, evidence, criterion.result, margin)
        )
    });
    Judgement {
        band: Some(band),
        margin: Some(margin),
        margin_of_band: Some(margin_of_band),
        finding,
        reason,
        ..empty
    }
}

/// Whether the whole band lies outside the limit, on one side of it.
fn is_outside(limit: &Limit, limits: &[f64], (low, high): (f64, f64)) -> bool {
    match (limit, limits) {
        (Limit::AtMost(_), [most]) => low > *most,
        (Limit::AtLeast(_), [least]) => high < *least,
        (_, [least, most]) => low > *most || high < *least,
        _ => false,
    }
}
