//! results.json as another program version, or a stranger, may have written it.
//!
//! Keys that are not known here are passed over: a later version may say more.

use std::fmt;

use serde::Deserialize;

/// Where a package holds it, below `data/`.
pub const PATH: &str = "results/results.json";

#[derive(Clone, Debug, Deserialize, PartialEq)]
pub struct Results {
    pub format: u32,
    pub program: Program,
    pub inputs_sha256: String,
    pub finding: String,
    pub cases: Vec<CaseResults>,
}

#[derive(Clone, Debug, Deserialize, PartialEq)]
pub struct Program {
    pub name: String,
    pub version: String,
}

#[derive(Clone, Debug, Deserialize, PartialEq)]
pub struct CaseResults {
    pub id: String,
    pub results: Vec<ResultValue>,
    pub criteria: Vec<CriterionFinding>,
}

/// Numbers are in `unit`; none where there is no value or nothing is claimed.
#[derive(Clone, Debug, Deserialize, PartialEq)]
pub struct ResultValue {
    pub symbol: String,
    pub unit: String,
    pub value: Option<f64>,
    pub numerical_uncertainty: Option<f64>,
    pub band: Option<[f64; 2]>,
}

#[derive(Clone, Debug, Deserialize, PartialEq)]
pub struct CriterionFinding {
    pub id: String,
    pub finding: String,
    pub margin: Option<f64>,
    pub margin_of_band: Option<f64>,
    pub unit: String,
}

/// Why a results.json cannot be used.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum ResultsFault {
    Missing,
    Malformed { line: usize },
    Format { found: u32 },
}

impl Results {
    /// Reads the bytes of a package's results.json.
    pub fn parse(bytes: Option<&[u8]>) -> Result<Results, ResultsFault> {
        let bytes = bytes.ok_or(ResultsFault::Missing)?;
        let results: Results = serde_json::from_slice(bytes)
            .map_err(|error| ResultsFault::Malformed { line: error.line() })?;
        if results.format == 1 {
            Ok(results)
        } else {
            Err(ResultsFault::Format {
                found: results.format,
            })
        }
    }

    pub fn case(&self, id: &str) -> Option<&CaseResults> {
        self.cases.iter().find(|case| case.id == id)
    }
}

impl CaseResults {
    pub fn result(&self, symbol: &str) -> Option<&ResultValue> {
        self.results.iter().find(|result| result.symbol == symbol)
    }

    pub fn criterion(&self, id: &str) -> Option<&CriterionFinding> {
        self.criteria.iter().find(|criterion| criterion.id == id)
    }
}

impl fmt::Display for ResultsFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "`data/{PATH}`: ")?;
        match self {
            ResultsFault::Missing => f.write_str("the file is missing"),
            ResultsFault::Malformed { line } => {
                write!(f, "line {line} is not as results are written")
            }
            ResultsFault::Format { found } => {
                write!(
                    f,
                    "format {found}; this version reads format 1, a later one may read it"
                )
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const SMALL: &str = r#"{ "format": 1, "program": { "name": "countermarch", "version": "9.9.9", "more": 1 },
        "inputs_sha256": "00", "finding": "supported", "later": [1, 2],
        "cases": [ { "id": "base", "results": [], "criteria": [] } ] }"#;

    #[test]
    fn hand_later_keys_are_passed_over_and_faults_are_named() {
        let results = Results::parse(Some(SMALL.as_bytes())).unwrap();
        assert_eq!(results.program.version, "9.9.9");
        assert!(results.case("base").is_some() && results.case("other").is_none());
        let other = SMALL.replace("\"format\": 1", "\"format\": 2");
        assert_eq!(
            Results::parse(Some(other.as_bytes())),
            Err(ResultsFault::Format { found: 2 })
        );
        assert_eq!(Results::parse(None), Err(ResultsFault::Missing));
        let deep = "[".repeat(100_000);
        for bad in [
            "",
            "{",
            "[]",
            "{\"format\": 1}",
            "{\"format\": 1e999}",
            deep.as_str(),
        ] {
            assert!(
                matches!(
                    Results::parse(Some(bad.as_bytes())),
                    Err(ResultsFault::Malformed { .. })
                ),
                "{bad:.20}"
            );
        }
    }
}
