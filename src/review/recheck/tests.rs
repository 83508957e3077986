use super::*;
use crate::package::Limits;
use crate::package::bag::{self, BagInfo, Payload};
use crate::review::DEPENDENCIES_FIELD;
use crate::review::results::{CaseResults, CriterionFinding, Program, ResultValue, Results};

fn results(value: Option<f64>, uncertainty: Option<f64>, finding: &str) -> Results {
    Results {
        format: 1,
        program: Program {
            name: "countermarch".to_owned(),
            version: "0.0.1".to_owned(),
        },
        inputs_sha256: "00".to_owned(),
        finding: "supported".to_owned(),
        cases: vec![CaseResults {
            id: "base".to_owned(),
            results: vec![ResultValue {
                symbol: "t_alarm".to_owned(),
                unit: "min".to_owned(),
                value,
                numerical_uncertainty: uncertainty,
                band: None,
            }],
            criteria: vec![CriterionFinding {
                id: "K1".to_owned(),
                finding: finding.to_owned(),
                margin: None,
                margin_of_band: None,
                unit: "min".to_owned(),
            }],
        }],
    }
}

fn n_faults(stated: &Results, again: &Results) -> usize {
    agreement(stated, again).1.len()
}

#[test]
fn hand_a_result_agrees_within_its_stated_uncertainty() {
    let stated = results(Some(13.0), Some(0.01), "met");
    let again = |value, uncertainty| results(value, uncertainty, "met");
    let (found, faults) = agreement(&stated, &again(Some(13.009), Some(0.01)));
    assert!(faults.is_empty());
    let largest = found.largest.unwrap();
    assert!((largest.difference - 0.009).abs() < 1e-12);
    assert_eq!(n_faults(&stated, &again(Some(13.011), Some(0.01))), 1);
    assert_eq!(n_faults(&stated, &again(None, None)), 1);
    assert_eq!(n_faults(&stated, &again(Some(f64::NAN), Some(0.01))), 1);
    // Nothing claimed: round-off alone is allowed.
    let unclaimed = results(Some(13.0), None, "met");
    assert_eq!(
        n_faults(&unclaimed, &again(Some(13.000_000_000_000_01), None)),
        0
    );
    assert_eq!(n_faults(&unclaimed, &again(Some(13.000_001), None)), 1);
}

#[test]
fn hand_a_stated_uncertainty_that_is_inflated_excuses_nothing() {
    let stated = results(Some(15.0), Some(10.0), "met");
    assert_eq!(
        n_faults(&stated, &results(Some(13.0), Some(0.01), "met")),
        1
    );
}

#[test]
fn hand_findings_cases_and_inputs_must_be_the_same() {
    let stated = results(Some(13.0), Some(0.01), "met");
    assert_eq!(
        n_faults(&stated, &results(Some(13.0), Some(0.01), "not met")),
        1
    );
    let mut other = stated.clone();
    other.finding = "not supported".to_owned();
    other.inputs_sha256 = "01".to_owned();
    other.cases[0].id = "base\u{1b}[2J".to_owned();
    let faults = agreement(&stated, &other).1;
    assert_eq!(faults.len(), 4, "{faults:?}");
    for fault in faults {
        let line = fault.to_string();
        assert!(!line.contains('\u{1b}') && !line.contains('\n'), "{line}");
    }
}

fn bag_of(files: &[(&str, &str)], revision: &str) -> Bag {
    let payload: Payload = files
        .iter()
        .map(|(path, text)| ((*path).to_owned(), text.as_bytes().to_vec()))
        .collect();
    let field = |label: &str, value: &str| (label.to_owned(), value.to_owned());
    let info = BagInfo {
        fields: vec![
            field("Calculation-Revision", revision),
            field(PROBLEM_FIELD, "data/inputs/p.toml"),
            field(DEPENDENCIES_FIELD, revision),
        ],
        bagging_date: "2026-11-20".to_owned(),
    };
    bag::build(payload, &info, &Limits::WRITTEN).unwrap()
}

#[test]
fn hand_every_file_and_field_is_compared() {
    let found = bag_of(
        &[("inputs/p.toml", "a\nb\n"), ("record.md", "x"), ("z", "1")],
        "B",
    );
    let again = bag_of(
        &[("inputs/p.toml", "a\nc\n"), ("record.md", "x"), ("y", "1")],
        "C",
    );
    let mut recheck = Recheck::of("p");
    bytes(&mut recheck, &found, &again);
    assert_eq!(recheck.n_compared, 4);
    assert_eq!(recheck.notes, [Note::OtherDependencies]);
    let text = |value: &str| value.to_owned();
    assert_eq!(
        recheck.faults,
        [
            Fault::Differs {
                path: text("inputs/p.toml"),
                offset: 2,
                line: Some(2)
            },
            Fault::Missing { path: text("y") },
            Fault::Extra { path: text("z") },
            Fault::Field {
                label: text("Calculation-Revision"),
                found: Some(text("B")),
                expected: Some(text("C")),
            },
        ]
    );
    let mut same = Recheck::of("p");
    bytes(&mut same, &found, &found);
    assert!(same.is_reproduced() && same.notes.is_empty());
}

#[test]
fn hand_the_problem_file_lies_among_the_inputs() {
    let problem = |files: &[(&str, &str)]| {
        let bag = bag_of(files, "B");
        enclosed(&bag).map(|enclosed| (enclosed.problem, enclosed.files.len()))
    };
    assert_eq!(
        problem(&[
            ("inputs/p.toml", "a"),
            ("inputs/d/x.csv", "b"),
            ("record.md", "c")
        ]),
        Ok(("p.toml".to_owned(), 2))
    );
    assert_eq!(problem(&[("record.md", "c")]), Err(Fault::NoProblem));
}
