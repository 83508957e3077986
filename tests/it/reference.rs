//! The reference cases of `tests/reference-cases/` as problem files, and what they are expected to give.
//!
//! Everything is dimensionless here: the cases carry numbers in coherent units of their own.

use std::collections::BTreeMap;
use std::fmt::Write;
use std::fs;
use std::path::Path;

use countermarch::diagnostic::Listing;
use countermarch::evidence::{self, Ladder};
use countermarch::float;
use countermarch::pipeline::{self, Failure, Trial};
use countermarch::problem::{read, resolve};
use countermarch::world::Files;
use serde_json::Value;

/// Files in the form that the folder's README calls the case form.
pub const CASE_FILES: &[&str] = &[
    "engineering.json",
    "detest_nonstiff.json",
    "detest_stiff.json",
    "ivp_testset.json",
    "library_computed.json",
    "atmosphere.json",
];

/// A reference case.
pub struct Case {
    pub id: String,
    json: Value,
}

/// A result of the problem file made from a case, and the value that it should have.
pub struct Expected {
    /// Symbol of the result.
    pub result: String,
    /// In the case's own words: "h at 100".
    pub what: String,
    pub value: f64,
    /// How far the reference itself is trusted.
    pub allowance: f64,
}

/// A march to be made: method and number of steps over the span.
#[derive(Clone, Copy)]
pub struct March<'a> {
    pub method: &'a str,
    pub steps: u32,
    pub levels: u32,
}

/// A `Case` set down as a problem file.
pub struct Problem {
    pub text: String,
    pub expected: Vec<Expected>,
}

pub fn read_json(file: &str) -> Value {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/reference-cases")
        .join(file);
    let text =
        fs::read_to_string(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()));
    serde_json::from_str(&text).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

pub fn cases(file: &str) -> Vec<Case> {
    let list = read_json(file);
    list.as_array()
        .expect("an array of cases")
        .iter()
        .map(|json| Case {
            id: text(&json["id"]).to_owned(),
            json: json.clone(),
        })
        .collect()
}

impl Case {
    pub fn is_stiff(&self) -> bool {
        self.json["stiff"].as_bool().expect("stiff")
    }

    pub fn problem(&self, march: March) -> Problem {
        let json = &self.json;
        let mut file = head(&self.id);
        for (symbol, value) in json["constants"].as_object().expect("constants") {
            // π is the only constant that the language has.
            if symbol != "pi" {
                input(&mut file, symbol, number(value));
            }
        }
        for pair in json["auxiliary"].as_array().expect("auxiliary") {
            quantity(&mut file, text(&pair[0]), text(&pair[1]));
        }
        for state in json["states"].as_array().expect("states") {
            self::state(
                &mut file,
                text(&state["symbol"]),
                number(&state["initial"]),
                text(&state["rate"]),
            );
        }
        let variable = text(&json["independent_variable"]);
        let (from, to) = (number(&json["from"]), number(&json["to"]));
        let mut expected = self.values();
        self.crossings(&mut file, &mut expected);
        self::march(
            &mut file,
            variable,
            (from, to),
            (to - from) / f64::from(march.steps),
            march.method,
            march.levels,
        );
        for (index, (formula, entry)) in expected.iter_mut().enumerate() {
            entry.result = format!("out_{index}");
            result(&mut file, &entry.result, formula);
        }
        Problem {
            text: file,
            expected: expected.into_iter().map(|(_, entry)| entry).collect(),
        }
    }

    /// Values of states and auxiliaries at stated places, as result formulas.
    fn values(&self) -> Vec<(String, Expected)> {
        let mut found = Vec::new();
        for entry in self.json["expected"].as_array().expect("expected") {
            let at = number(&entry["at"]);
            for (name, value) in entry["values"].as_object().expect("values") {
                let value = number(value);
                let expected = Expected {
                    result: String::new(),
                    what: format!("{name} at {at}"),
                    value,
                    allowance: allowance(entry, name, value),
                };
                found.push((format!("value_at({name}, {at:?})"), expected));
            }
        }
        found
    }

    /// First passages through zero, as events that end nothing.
    fn crossings(&self, file: &mut String, expected: &mut Vec<(String, Expected)>) {
        for (index, crossing) in self.json["crossings"]
            .as_array()
            .into_iter()
            .flatten()
            .enumerate()
        {
            let id = format!("crossing_{index}");
            let sign = if crossing["direction"].as_i64() == Some(1) {
                ">"
            } else {
                "<"
            };
            let of = text(&crossing["of"]);
            let _ = write!(
                file,
                "[[event]]\nid = \"{id}\"\nwhen = \"{of} {sign} 0\"\nat_start = false\n\n"
            );
            let mut expect = |formula: String, what: String, name: &str, value: f64| {
                expected.push((
                    formula,
                    Expected {
                        result: String::new(),
                        what,
                        value,
                        allowance: allowance(crossing, name, value),
                    },
                ));
            };
            if let Some(at) = crossing["at"].as_f64() {
                expect(
                    format!("time_of({id})"),
                    format!("crossing of {of}"),
                    "at",
                    at,
                );
            }
            for (name, value) in crossing["values"].as_object().into_iter().flatten() {
                expect(
                    format!("value_at({name}, time_of({id}))"),
                    format!("{name} at crossing of {of}"),
                    name,
                    number(value),
                );
            }
        }
    }
}

/// |error| allowed to the reference itself, as the folder's README defines it.
fn allowance(entry: &Value, name: &str, value: f64) -> f64 {
    let absolute = entry["abs"].as_f64().unwrap_or(0.0);
    let digits = entry["digits_of"][name]
        .as_f64()
        .or(entry["digits"].as_f64());
    let relative = match digits {
        Some(digits) => 5.0 * float::pow(10.0, -digits),
        None => entry["rel"].as_f64().expect("digits, or rel and abs"),
    };
    absolute + relative * value.abs()
}

/// The parts of a problem file that every case needs.
pub fn head(title: &str) -> String {
    format!(
        "format = 1\n\n[calculation]\nnumber = \"T\"\ntitle = \"{title}\"\nrevision = \"A\"\ndate = 2026-11-20\n\
         standing = \"preliminary\"\npurpose = \"Comparison with a reference.\"\n\n"
    )
}

pub fn input(file: &mut String, symbol: &str, value: f64) {
    let _ = write!(
        file,
        "[[input]]\nsymbol = \"{symbol}\"\nmeaning = \"constant\"\nvalue = {value:?}\nsource = \"reference case\"\n\n"
    );
}

pub fn quantity(file: &mut String, symbol: &str, formula: &str) {
    let _ = write!(
        file,
        "[[quantity]]\nsymbol = \"{symbol}\"\nmeaning = \"auxiliary\"\nunit = \"1\"\nformula = \"{formula}\"\n\n"
    );
}

pub fn state(file: &mut String, symbol: &str, initial: f64, rate: &str) {
    let _ = write!(
        file,
        "[[state]]\nsymbol = \"{symbol}\"\nmeaning = \"state\"\nunit = \"1\"\ninitial = {initial:?}\ninitial_source = \"reference case\"\nrate = \"{rate}\"\n\n"
    );
}

pub fn march(
    file: &mut String,
    variable: &str,
    (from, to): (f64, f64),
    step: f64,
    method: &str,
    levels: u32,
) {
    let _ = write!(
        file,
        "[march]\nvariable = \"{variable}\"\nunit = \"1\"\nfrom = {from:?}\nto = {to:?}\nmethod = \"{method}\"\nstep = {step:?}\nlevels = {levels}\n\n"
    );
}

pub fn result(file: &mut String, symbol: &str, formula: &str) {
    let _ = write!(
        file,
        "[[result]]\nsymbol = \"{symbol}\"\nmeaning = \"result\"\nunit = \"1\"\nformula = \"{formula}\"\n\n"
    );
}

/// Solves a problem file that is expected to be without fault.
pub fn solve(text: &str) -> Trial {
    match pipeline::solve(
        &mut Files::enclosed([("problem.toml", text.as_bytes())]),
        "problem.toml",
    ) {
        Ok(trial) => trial,
        Err(Failure::Input {
            diagnostics,
            sources,
        }) => {
            panic!(
                "{}",
                Listing {
                    diagnostics: &diagnostics,
                    sources: &sources
                }
            )
        }
        Err(failure) => panic!("{failure:?}"),
    }
}

/// The ladder of a result in the base case.
pub fn ladder<'a>(trial: &'a Trial, symbol: &str) -> &'a Ladder {
    let index = trial
        .model
        .results
        .iter()
        .position(|result| result.symbol == symbol);
    &trial.cases[0].results[index.unwrap_or_else(|| panic!("no result {symbol}"))].ladder
}

/// The ladders of the base case alone, by the symbols of their results: what claims in their thousands need.
pub fn ladders(text: &str) -> BTreeMap<String, Ladder> {
    let (text, section) =
        read::read("problem.toml", text.as_bytes()).unwrap_or_else(|faults| panic!("{faults:?}"));
    let (model, _) = resolve::resolve("problem.toml", &text, &section, &BTreeMap::new())
        .unwrap_or_else(|faults| panic!("{faults:?}"));
    let results = evidence::ladders(&model)
        .unwrap_or_else(|(_, error)| panic!("{error:?}"))
        .swap_remove(0);
    let symbols = model.results.iter().map(|result| result.symbol.clone());
    symbols
        .zip(results.into_iter().map(|result| result.ladder))
        .collect()
}

pub fn text(value: &Value) -> &str {
    value
        .as_str()
        .unwrap_or_else(|| panic!("a text, not {value}"))
}

pub fn number(value: &Value) -> f64 {
    value
        .as_f64()
        .unwrap_or_else(|| panic!("a number, not {value}"))
}

/// The float nearest to a fraction "13/8" or a decimal.
pub fn fraction(text: &str) -> f64 {
    let part = |text: &str| {
        text.parse::<f64>()
            .unwrap_or_else(|_| panic!("a fraction, not {text}"))
    };
    match text.split_once('/') {
        Some((above, below)) => part(above) / part(below),
        None => part(text),
    }
}
