//! The comparison of numbers: what is left to judge when another version made the package.
//!
//! A result agrees when it differs by no more than the numerical uncertainty that the package states for it,
//! with an allowance for round-off; where none is stated, by no more than round-off. Findings must be equal.

use std::collections::BTreeSet;

use super::Fault;
use crate::review::results::{CaseResults, ResultValue, Results};
use crate::review::table::plain;

/// Allowance for round-off, relative to the value: another order of the same additions (common practice, no source).
const ROUND_OFF: f64 = 1e-12;

/// Results beside each other.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Agreement {
    pub n_results: usize,
    /// The result with the largest difference for its stated uncertainty; none when all are equal.
    pub largest: Option<Difference>,
}

/// A result that is not the same to the last digit.
#[derive(Clone, Debug, PartialEq)]
pub struct Difference {
    pub case: String,
    pub symbol: String,
    pub unit: String,
    pub difference: f64,
    pub uncertainty: Option<f64>,
}

impl Agreement {
    /// One line: how many results, and the largest difference.
    pub fn words(&self) -> String {
        let Some(largest) = &self.largest else {
            return format!(
                "{} results compared: all the same to the last digit",
                self.n_results
            );
        };
        let uncertainty = match largest.uncertainty {
            Some(uncertainty) => format!("its numerical uncertainty is {uncertainty}"),
            None => "no numerical uncertainty is stated for it".to_owned(),
        };
        let line = format!(
            "{} results compared: the largest difference is {} {} in {} of case {}; {uncertainty}",
            self.n_results, largest.difference, largest.unit, largest.symbol, largest.case
        );
        plain(&line)
    }
}

impl Difference {
    /// The difference in parts of what is allowed.
    fn share(&self) -> f64 {
        match self.uncertainty {
            Some(uncertainty) if uncertainty > 0.0 => self.difference / uncertainty,
            _ => f64::INFINITY,
        }
    }
}

/// Compares what a package states with what its inputs give.
pub fn agreement(stated: &Results, again: &Results) -> (Agreement, Vec<Fault>) {
    let mut agreement = Agreement::default();
    let mut faults = Vec::new();
    if stated.inputs_sha256 != again.inputs_sha256 {
        faults.push(Fault::InputsDigest);
    }
    if stated.finding != again.finding {
        faults.push(outcome("", "the finding", &stated.finding, &again.finding));
    }
    let cases = |results: &Results| results.cases.iter().map(|case| case.id.clone()).collect();
    let ids: BTreeSet<String> = union(cases(stated), cases(again));
    for id in ids {
        match (stated.case(&id), again.case(&id)) {
            (Some(stated), Some(again)) => {
                compare_case(stated, again, &mut agreement, &mut faults);
            }
            (found, _) => faults.push(one_sided(&id, "the case", found.is_some())),
        }
    }
    (agreement, faults)
}

fn compare_case(
    stated: &CaseResults,
    again: &CaseResults,
    agreement: &mut Agreement,
    faults: &mut Vec<Fault>,
) {
    let id = &stated.id;
    let symbols = |case: &CaseResults| case.results.iter().map(|r| r.symbol.clone()).collect();
    for symbol in union(symbols(stated), symbols(again)) {
        match (stated.result(&symbol), again.result(&symbol)) {
            (Some(stated), Some(again)) => {
                agreement.n_results += 1;
                compare_result(id, stated, again, agreement, faults);
            }
            (found, _) => faults.push(one_sided(id, &symbol, found.is_some())),
        }
    }
    let ids = |case: &CaseResults| case.criteria.iter().map(|c| c.id.clone()).collect();
    for criterion in union(ids(stated), ids(again)) {
        match (stated.criterion(&criterion), again.criterion(&criterion)) {
            (Some(stated), Some(again)) if stated.finding == again.finding => {}
            (Some(stated), Some(again)) => {
                let what = format!("criterion {criterion}");
                faults.push(outcome(id, &what, &stated.finding, &again.finding));
            }
            (found, _) => faults.push(one_sided(id, &criterion, found.is_some())),
        }
    }
}

fn compare_result(
    case: &str,
    stated: &ResultValue,
    again: &ResultValue,
    agreement: &mut Agreement,
    faults: &mut Vec<Fault>,
) {
    let shown = |result: &ResultValue| match result.value {
        Some(value) => format!("{value} {}", result.unit),
        None => "no value".to_owned(),
    };
    let differs = || outcome(case, &stated.symbol, &shown(stated), &shown(again));
    if stated.unit != again.unit {
        faults.push(differs());
        return;
    }
    let (value, other) = match (stated.value, again.value) {
        (Some(value), Some(other)) => (value, other),
        (None, None) => return,
        _ => {
            faults.push(differs());
            return;
        }
    };
    let difference = Difference {
        case: case.to_owned(),
        symbol: stated.symbol.clone(),
        unit: stated.unit.clone(),
        difference: (value - other).abs(),
        uncertainty: stated.numerical_uncertainty,
    };
    if difference.difference == 0.0 {
        return;
    }
    // A stranger's package states its own uncertainty: it must not excuse more than the recomputed one does.
    let claimed = match (stated.numerical_uncertainty, again.numerical_uncertainty) {
        (Some(stated), Some(again)) => stated.min(2.0 * again),
        _ => 0.0,
    };
    let allowed = claimed.max(0.0) + ROUND_OFF * value.abs().max(other.abs());
    if difference.difference.is_nan() || difference.difference > allowed {
        let mut fault = differs();
        if let Fault::Outcome { recomputed, .. } = &mut fault {
            *recomputed = format!("{recomputed}, more apart than the stated uncertainty allows");
        }
        faults.push(fault);
    }
    let is_larger = |largest: &Difference| difference.share() > largest.share();
    if agreement.largest.as_ref().is_none_or(is_larger) {
        agreement.largest = Some(difference);
    }
}

fn outcome(case: &str, what: &str, stated: &str, recomputed: &str) -> Fault {
    Fault::Outcome {
        case: case.to_owned(),
        what: what.to_owned(),
        stated: stated.to_owned(),
        recomputed: recomputed.to_owned(),
    }
}

fn one_sided(case: &str, what: &str, is_stated: bool) -> Fault {
    let words = |is_there: bool| if is_there { "present" } else { "absent" };
    outcome(case, what, words(is_stated), words(!is_stated))
}

fn union(mut a: BTreeSet<String>, b: BTreeSet<String>) -> BTreeSet<String> {
    a.extend(b);
    a
}
