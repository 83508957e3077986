use std::collections::BTreeMap;

use super::changes::TOPICS;
use super::outcome::{criteria, results};
use super::*;
use crate::problem::keys::PROBLEM;
use crate::problem::read::{self, Section};

const SMALL: &str = r#"
format = 1
[calculation]
number = "N-1"
title = "Tank"
revision = "A"
date = 2026-11-20
standing = "for check"
purpose = "To   see."
[roles]
originator = { name = "A" }
[[input]]
symbol = "C_d"
meaning = "coefficient"
value = 0.61
source = "R1"
[[input]]
symbol = "h_0"
meaning = "depth"
value = "3.20 m"
source = "R1"
within = ["1 m", "4 m"]
[[state]]
symbol = "h"
meaning = "depth"
unit = "m"
initial = "h_0"
rate = "-C_d * h / measure(1, \"s\")"
[[event]]
id = "low"
when = "h < h_0 / 2"
action = "note"
[[event]]
id = "empty"
when = "h < h_0/9"
action = "stop"
[march]
variable = "t"
unit = "s"
from = "0 s"
to = "12 min"
method = "heun"
step = "1 s"
[[result]]
symbol = "t_low"
meaning = "time"
unit = "s"
formula = "time_of(low)"
[[criterion]]
id = "K1"
text = "Late enough."
result = "t_low"
at_least = "1 s"
source = "R1"
"#;

fn section(text: &str) -> Section {
    let read = read::read("p.toml", text.as_bytes());
    read.unwrap_or_else(|faults| panic!("{faults:?}")).1
}

fn changes(edits: &[(&str, &str)]) -> Changes {
    let mut text = SMALL.to_owned();
    for (from, to) in edits {
        assert!(text.contains(from), "{from}");
        text = text.replacen(from, to, 1);
    }
    let (old, new) = (section(SMALL), section(&text));
    let statement = |section| Statement {
        section,
        files: BTreeMap::new(),
    };
    let changes = inputs(&statement(&old), &statement(&new));
    let back = inputs(&statement(&new), &statement(&old));
    assert_eq!(changes.of_substance.len(), back.of_substance.len());
    assert_eq!(changes.apart.len(), back.apart.len());
    changes
}

/// One edit, the change of substance that it makes.
fn check(from: &str, to: &str, topic: Topic, item: &str, key: &str, sides: (&str, &str)) {
    let found = changes(&[(from, to)]);
    let side = |words: &str| (!words.is_empty()).then(|| words.to_owned());
    let expected = Change {
        topic,
        item: item.to_owned(),
        key: key.to_owned(),
        before: side(sides.0),
        after: side(sides.1),
    };
    assert_eq!(found.of_substance, [expected]);
    assert!(found.apart.is_empty(), "{:?}", found.apart);
    assert!(found.is_changed_after_check());
}

#[test]
fn hand_each_change_of_substance_is_named() {
    check(
        "0.61",
        "0.65",
        Topic::Inputs,
        "input C_d",
        "value",
        ("0.61", "0.65"),
    );
    check(
        "\"4 m\"",
        "\"5 m\"",
        Topic::Inputs,
        "input h_0",
        "within",
        ("[1 m, 4 m]", "[1 m, 5 m]"),
    );
    check(
        "-C_d * h",
        "-C_d * h^2",
        Topic::Equations,
        "state h",
        "rate",
        (
            "-C_d * h / measure(1, \"s\")",
            "-C_d * h^2 / measure(1, \"s\")",
        ),
    );
    check(
        "\"heun\"",
        "\"rk4\"",
        Topic::Method,
        "march",
        "method",
        ("heun", "rk4"),
    );
    check(
        "at_least = \"1 s\"",
        "at_most = \"1 s\"\nat_least = \"1 s\"",
        Topic::Criteria,
        "criterion K1",
        "at_most",
        ("", "1 s"),
    );
    check(
        "To   see.",
        "To look.",
        Topic::Words,
        "calculation",
        "purpose",
        ("To see.", "To look."),
    );
    check(
        "[march]",
        "[[assumption]]\nid = \"A1\"\ntext = \"x\"\nbasis = \"R1\"\nstanding = \"confirmed\"\n[march]",
        Topic::Assumptions,
        "assumption A1",
        "",
        ("", "id = A1; text = x; basis = R1; standing = confirmed"),
    );
}

#[test]
fn hand_the_turns_of_the_check_cycle_stand_apart() {
    let found = changes(&[
        ("revision = \"A\"", "revision = \"B\""),
        ("2026-11-20", "2026-11-21"),
        ("\"for check\"", "\"preliminary\""),
        ("[roles]", "[roles]\nchecker = { name = \"B\" }"),
        (
            "[march]",
            "[[comment]]\nid = \"Q1\"\nby = \"B\"\ntext = \"x\"\nstanding = \"closed\"\n[march]",
        ),
        ("[march]", "[verification]\nmethod = \"test\"\n[march]"),
        (
            "[march]",
            "[[revision]]\nmark = \"B\"\nchange = \"y\"\ndate = 2026-11-21\nby = \"A\"\n[march]",
        ),
    ]);
    assert!(!found.is_changed_after_check(), "{:?}", found.of_substance);
    assert_eq!(found.apart.len(), 7, "{:?}", found.apart);
}

#[test]
fn hand_the_same_written_differently_stands_apart() {
    let found = changes(&[
        ("3.20 m", "320 cm"),
        ("12 min", "720 s"),
        ("h_0/9", "h_0 / 9"),
        ("To   see.", "To see."),
    ]);
    assert!(!found.is_changed_after_check(), "{:?}", found.of_substance);
    assert_eq!(found.apart.len(), 3, "{:?}", found.apart);
}

#[test]
fn hand_order_matters_for_events_alone() {
    let events = |text: &str| {
        let low = text.find("[[event]]\nid = \"low\"").unwrap();
        let empty = text.find("[[event]]\nid = \"empty\"").unwrap();
        let end = text.find("[march]").unwrap();
        format!(
            "{}{}{}{}",
            &text[..low],
            &text[empty..end],
            &text[low..empty],
            &text[end..]
        )
    };
    let (old, new) = (section(SMALL), section(&events(SMALL)));
    let statement = |section| Statement {
        section,
        files: BTreeMap::new(),
    };
    let found = inputs(&statement(&old), &statement(&new));
    assert_eq!(found.of_substance.len(), 1);
    assert_eq!(found.of_substance[0].before.as_deref(), Some("low, empty"));
    assert!(found.apart.is_empty());
}

#[test]
fn hand_files_are_compared_by_content() {
    let section = section(SMALL);
    let side = |bytes: &'static [u8]| Statement {
        section: &section,
        files: BTreeMap::from([("a.csv", bytes)]),
    };
    assert_eq!(inputs(&side(b"1"), &side(b"1")), Changes::default());
    let found = inputs(&side(b"1"), &side(b"2"));
    assert_eq!(found.of_substance.len(), 1);
    assert_eq!(found.of_substance[0].topic, Topic::Files);
}

#[test]
fn prop_every_key_of_the_problem_file_has_its_topic() {
    for key in PROBLEM.keys {
        assert!(
            TOPICS.iter().any(|(name, _)| *name == key.name),
            "{}",
            key.name
        );
    }
}

#[test]
fn hand_long_texts_are_shown_from_where_they_part() {
    let alike = "one two three four five six seven eight nine ten eleven twelve";
    let (before, after) = from_where_they_part(&format!("{alike} a b"), &format!("{alike} c"));
    assert_eq!(
        (before.as_str(), after.as_str()),
        ("… ten eleven twelve a b", "… ten eleven twelve c")
    );
    let short = from_where_they_part("one two", "one three");
    assert_eq!(short, ("one two".to_owned(), "one three".to_owned()));
    let (before, after) = from_where_they_part(alike, "–");
    assert_eq!((before.as_str(), after.as_str()), (alike, "–"));
}

fn found(text: &str) -> Results {
    Results::parse(Some(text.as_bytes())).unwrap()
}

#[test]
fn hand_results_and_criteria_before_and_after() {
    let side = |value: &str, low: f64, high: f64, finding: &str| {
        found(&format!(
            r#"{{ "format": 1, "program": {{ "name": "n", "version": "1" }}, "inputs_sha256": "", "finding": "f",
            "cases": [ {{ "id": "base",
              "results": [ {{ "symbol": "t", "unit": "min", "value": {value}, "numerical_uncertainty": 0.01, "band": [{low}, {high}] }},
                           {{ "symbol": "same", "unit": "min", "value": 1.0, "numerical_uncertainty": null, "band": null }} ],
              "criteria": [ {{ "id": "K1", "finding": "{finding}", "margin": 1.0, "margin_of_band": 0.9, "unit": "min" }} ] }} ] }}"#
        ))
    };
    let old = side("13.0", 12.99, 13.01, "met");
    let new = side("11.5", 11.49, 11.51, "not met");
    let (changes, n_same) = results(&old, &new);
    assert_eq!((changes.len(), n_same), (1, 1));
    assert_eq!(changes[0].difference(), Some(-1.5));
    assert_eq!(changes[0].bands_are_apart(), Some(true));
    let (changes, n_same) = criteria(&old, &new);
    assert_eq!((changes.len(), n_same), (1, 0));
    let (changes, _) = results(&old, &side("13.005", 12.995, 13.015, "met"));
    assert_eq!(changes[0].bands_are_apart(), Some(false));
    let (changes, _) = results(&old, &side("null", 0.0, 0.0, "met"));
    assert_eq!(changes[0].difference(), None);
}
