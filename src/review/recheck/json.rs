//! A recheck for machines.

use serde::Serialize;

use super::Recheck;

#[derive(Serialize)]
struct File<'a> {
    package: &'a str,
    outcome: &'static str,
    number: Option<&'a str>,
    revision: Option<&'a str>,
    standing: Option<&'a str>,
    finding: Option<&'a str>,
    program_version: Option<&'a str>,
    fingerprint: Option<&'a str>,
    package_digest: Option<&'a str>,
    files_compared: usize,
    results_compared: usize,
    largest_difference: Option<LargestDifference<'a>>,
    not_opened: Option<&'a str>,
    faults: Vec<String>,
    notes: Vec<String>,
}

#[derive(Serialize)]
struct LargestDifference<'a> {
    case: &'a str,
    symbol: &'a str,
    unit: &'a str,
    difference: f64,
    numerical_uncertainty: Option<f64>,
}

impl Recheck {
    /// Reproduced byte for byte, agreeing in its numbers, or failed.
    pub fn outcome(&self) -> &'static str {
        match (self.is_reproduced(), &self.agreement) {
            (false, _) if self.not_opened.is_some() => "not opened",
            (false, _) => "failed",
            (true, None) => "reproduced",
            (true, Some(_)) => "agrees",
        }
    }

    /// One JSON object.
    pub fn json(&self) -> String {
        let identity = self.identity.as_ref();
        let largest = self.agreement.as_ref().and_then(|a| a.largest.as_ref());
        let file = File {
            package: &self.package,
            outcome: self.outcome(),
            number: identity.map(|identity| identity.number.as_str()),
            revision: identity.map(|identity| identity.revision.as_str()),
            standing: identity.map(|identity| identity.standing.as_str()),
            finding: self.finding.as_deref(),
            program_version: self.made_by.as_deref(),
            fingerprint: identity.map(|identity| identity.fingerprint.as_str()),
            package_digest: identity.map(|identity| identity.package_digest.as_str()),
            files_compared: self.n_compared,
            results_compared: self.agreement.as_ref().map_or(0, |a| a.n_results),
            largest_difference: largest.map(|largest| LargestDifference {
                case: &largest.case,
                symbol: &largest.symbol,
                unit: &largest.unit,
                difference: largest.difference,
                numerical_uncertainty: largest.uncertainty,
            }),
            not_opened: self.not_opened.as_deref(),
            faults: self.faults.iter().map(ToString::to_string).collect(),
            notes: self.notes.iter().map(ToString::to_string).collect(),
        };
        // A tree of texts and floats always serialises; floats that are not finite become null.
        serde_json::to_string_pretty(&file).unwrap_or_default()
    }
}
