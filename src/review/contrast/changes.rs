//! What two problem files state differently: every key of every table, so that nothing can change unseen.
//!
//! Items of repeated tables are matched by symbol, id, mark, file or title, else by position. A change that
//! leaves the meaning (spaces, 15.0 for 15, 720 s for 12 min, the order of entries that have none) stands apart.

use std::collections::{BTreeMap, BTreeSet};

use crate::float;
use crate::package::digest::Digest;
use crate::problem::keys::Shape;
use crate::problem::read::{Entry, Section, Value};
use crate::units::Quantity;

/// What a calculation states: its problem file and the files beside it.
pub struct Statement<'a> {
    pub section: &'a Section,
    /// Enclosed inputs other than the problem file.
    pub files: BTreeMap<&'a str, &'a [u8]>,
}

/// A key, item or file that is not the same.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Change {
    pub topic: Topic,
    pub item: String,
    /// Empty when the whole item came or went.
    pub key: String,
    pub before: Option<String>,
    pub after: Option<String>,
}

/// All changes between two statements.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Changes {
    pub of_substance: Vec<Change>,
    /// Roles, dates, standing, comments, revision text, and what is only written differently.
    pub apart: Vec<Change>,
}

impl Changes {
    /// Whether the check of the old calculation no longer covers the new one.
    pub fn is_changed_after_check(&self) -> bool {
        !self.of_substance.is_empty()
    }
}

/// What a change is about, in the order of print.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Topic {
    Inputs,
    Assumptions,
    Equations,
    Method,
    Cases,
    Criteria,
    Uncertainty,
    Checks,
    Files,
    Words,
    /// Who, when, and the check cycle itself: never of substance.
    Handling,
}

impl Topic {
    pub const ALL: [Topic; 11] = [
        Topic::Inputs,
        Topic::Assumptions,
        Topic::Equations,
        Topic::Method,
        Topic::Cases,
        Topic::Criteria,
        Topic::Uncertainty,
        Topic::Checks,
        Topic::Files,
        Topic::Words,
        Topic::Handling,
    ];

    pub fn title(self) -> &'static str {
        match self {
            Topic::Inputs => "Inputs and lookups",
            Topic::Assumptions => "Assumptions",
            Topic::Equations => "Equations, states and events",
            Topic::Method => "Method and grid",
            Topic::Cases => "Cases",
            Topic::Criteria => "Results wanted and criteria",
            Topic::Uncertainty => "Uncertainty of inputs",
            Topic::Checks => "Checks of the calculation",
            Topic::Files => "Files",
            Topic::Words => "Statement, sources and record",
            Topic::Handling => "Handling",
        }
    }

    fn of(table: &str) -> Topic {
        let known = TOPICS.iter().find(|(name, _)| *name == table);
        known.map_or(Topic::Words, |(_, topic)| *topic)
    }
}

/// The topic of each top-level key of the problem file; a key that is not here is of substance.
pub const TOPICS: &[(&str, Topic)] = &[
    ("input", Topic::Inputs),
    ("lookup", Topic::Inputs),
    ("site", Topic::Inputs),
    ("assumption", Topic::Assumptions),
    ("quantity", Topic::Equations),
    ("state", Topic::Equations),
    ("switch", Topic::Equations),
    ("event", Topic::Equations),
    ("march", Topic::Method),
    ("case", Topic::Cases),
    ("result", Topic::Criteria),
    ("criterion", Topic::Criteria),
    ("uncertainty", Topic::Uncertainty),
    ("correlation", Topic::Uncertainty),
    ("balance", Topic::Checks),
    ("closed_form", Topic::Checks),
    ("validation", Topic::Checks),
    ("known_error", Topic::Checks),
    ("format", Topic::Words),
    ("calculation", Topic::Words),
    ("reference", Topic::Words),
    ("record", Topic::Words),
    ("figure", Topic::Words),
    ("sketch", Topic::Words),
    ("attachment", Topic::Words),
    ("roles", Topic::Handling),
    // What the checker did is written after the check.
    ("verification", Topic::Handling),
    ("revision", Topic::Handling),
    ("comment", Topic::Handling),
];

/// Keys of `[calculation]` that change with every turn of the check cycle.
const HANDLING_OF_CALCULATION: [&str; 5] =
    ["revision", "date", "standing", "checked", "supersedes"];

/// Compares what two calculations state.
pub fn inputs(old: &Statement, new: &Statement) -> Changes {
    let mut changes = Changes::default();
    for key in old.section.table.keys {
        let topic = Topic::of(key.name);
        let sides = (old.section.entry(key.name), new.section.entry(key.name));
        compare(&mut changes, topic, key.name, "", key.shape, sides);
    }
    compare_files(&mut changes, old, new);
    changes
}

type Sides<'a> = (Option<&'a Entry>, Option<&'a Entry>);

fn compare(changes: &mut Changes, topic: Topic, item: &str, key: &str, shape: Shape, sides: Sides) {
    let (old, new) = sides;
    let value = |entry: Option<&'_ Entry>| entry.map(|entry| entry.value.clone());
    match (shape, value(old), value(new)) {
        (_, None, None) => {}
        (Shape::Sections(table), old, new) if key.is_empty() => {
            let (old, new) = (listed(old), listed(new));
            compare_items(changes, topic, table.name, &old, &new);
        }
        (Shape::Section(_), Some(Value::Section(old)), Some(Value::Section(new))) => {
            compare_sections(changes, topic, &joined(item, key), &old, &new);
        }
        (shape, old, new) => {
            let words = |value: &Option<Value>| value.as_ref().map(in_words);
            let (before, after) = (words(&old), words(&new));
            let is_same_meaning = match (&old, &new) {
                (Some(old), Some(new)) => means(shape, old) == means(shape, new),
                _ => false,
            };
            if is_same_meaning && before == after {
                return;
            }
            changes.add(topic, is_same_meaning, item, key, (before, after));
        }
    }
}

fn compare_sections(changes: &mut Changes, topic: Topic, item: &str, old: &Section, new: &Section) {
    for key in old.table.keys {
        let is_handling = item == "calculation" && HANDLING_OF_CALCULATION.contains(&key.name);
        let topic = if is_handling { Topic::Handling } else { topic };
        let sides = (old.entry(key.name), new.entry(key.name));
        compare(changes, topic, item, key.name, key.shape, sides);
    }
}

fn compare_items(
    changes: &mut Changes,
    topic: Topic,
    table: &str,
    old: &[Section],
    new: &[Section],
) {
    let (old, new) = (named(old), named(new));
    for (name, section) in &old {
        let item = format!("{table} {name}");
        match find(&new, name) {
            Some(other) => compare_sections(changes, topic, &item, section, other),
            None => changes.add(topic, false, &item, "", (Some(summary(section)), None)),
        }
    }
    for (name, section) in &new {
        if find(&old, name).is_none() {
            let item = format!("{table} {name}");
            changes.add(topic, false, &item, "", (None, Some(summary(section))));
        }
    }
    let order = |these: &[(String, &Section)], others: &[(String, &Section)]| {
        let common = these
            .iter()
            .filter(|(name, _)| find(others, name).is_some());
        common
            .map(|(name, _)| name.clone())
            .collect::<Vec<_>>()
            .join(", ")
    };
    let (before, after) = (order(&old, &new), order(&new, &old));
    if before != after {
        // Events at one instant act in the order of the file.
        let is_same_meaning = table != "event";
        let sides = (Some(before), Some(after));
        changes.add(topic, is_same_meaning, table, "order", sides);
    }
}

fn compare_files(changes: &mut Changes, old: &Statement, new: &Statement) {
    let names: BTreeSet<&str> = old.files.keys().chain(new.files.keys()).copied().collect();
    for name in names {
        let (before, after) = (old.files.get(name), new.files.get(name));
        if before != after {
            let words = |bytes: Option<&&[u8]>| bytes.map(|bytes| file_words(bytes));
            let sides = (words(before), words(after));
            changes.add(Topic::Files, false, name, "content", sides);
        }
    }
}

impl Changes {
    fn add(
        &mut self,
        topic: Topic,
        is_same_meaning: bool,
        item: &str,
        key: &str,
        (before, after): (Option<String>, Option<String>),
    ) {
        let change = Change {
            topic,
            item: item.to_owned(),
            key: key.to_owned(),
            before,
            after,
        };
        if is_same_meaning || topic == Topic::Handling {
            self.apart.push(change);
        } else {
            self.of_substance.push(change);
        }
    }
}

fn joined(item: &str, key: &str) -> String {
    [item, key]
        .into_iter()
        .filter(|part| !part.is_empty())
        .collect::<Vec<_>>()
        .join(", ")
}

fn listed(value: Option<Value>) -> Vec<Section> {
    match value {
        Some(Value::Sections(sections)) => sections,
        _ => Vec::new(),
    }
}

/// Each section with the name by which it is matched; a name that occurs again gets a number.
fn named(sections: &[Section]) -> Vec<(String, &Section)> {
    let mut seen: BTreeMap<String, usize> = BTreeMap::new();
    let mut named = Vec::new();
    for section in sections {
        let own = ["symbol", "id", "mark", "file", "title"]
            .into_iter()
            .filter(|key| section.table.key(key).is_some())
            .find_map(|key| section.text(key))
            .unwrap_or_default();
        let count = seen.entry(own.to_owned()).or_default();
        *count += 1;
        let name = match (own, *count) {
            ("", count) => format!("no. {count}"),
            (own, 1) => own.to_owned(),
            (own, count) => format!("{own} ({count})"),
        };
        named.push((name, section));
    }
    named
}

fn find<'a>(named: &[(String, &'a Section)], name: &str) -> Option<&'a Section> {
    let found = named.iter().find(|(other, _)| other == name);
    found.map(|(_, section)| *section)
}

fn summary(section: &Section) -> String {
    let keys = section.table.keys.iter();
    let said = keys.filter_map(|key| Some((key.name, section.entry(key.name)?)));
    said.map(|(name, entry)| format!("{name} = {}", in_words(&entry.value)))
        .collect::<Vec<_>>()
        .join("; ")
}

/// A value as written, on one line.
fn in_words(value: &Value) -> String {
    let all = |words: Vec<String>| format!("[{}]", words.join(", "));
    match value {
        Value::Text(text) => text.split_whitespace().collect::<Vec<_>>().join(" "),
        Value::Integer(integer) => integer.to_string(),
        Value::Number(number) => float::shortest(*number),
        Value::Truth(truth) => truth.to_string(),
        Value::Date(date) => date.to_string(),
        Value::List(list) => all(list.iter().map(|entry| in_words(&entry.value)).collect()),
        Value::Points(points) => {
            let point =
                |(x, y): &(f64, f64)| format!("[{}, {}]", float::shortest(*x), float::shortest(*y));
            all(points.iter().map(point).collect())
        }
        Value::Map(map) => {
            let pair =
                |(name, entry): &(String, Entry)| format!("{name} = {}", in_words(&entry.value));
            map.iter().map(pair).collect::<Vec<_>>().join(", ")
        }
        Value::Section(section) => summary(section),
        Value::Sections(sections) => all(sections.iter().map(summary).collect()),
    }
}

/// What a value means, spelled so that equal meanings are equal text.
fn means(shape: Shape, value: &Value) -> String {
    let takes_formulas = matches!(
        shape,
        Shape::Quantity | Shape::Expression | Shape::Formula | Shape::Bounds | Shape::Assignments
    );
    match value {
        Value::Text(text) if takes_formulas => match Quantity::parse(text) {
            Ok(quantity) => quantity_means(&quantity),
            // In a formula spaces separate nothing that could be read otherwise, except inside quotes.
            Err(_) if !text.contains(['"', '\'']) => text.split_whitespace().collect(),
            Err(_) => text.clone(),
        },
        Value::Integer(integer) if takes_formulas => float::shortest(*integer as f64),
        Value::List(list) => {
            let parts = list.iter().map(|entry| means(shape, &entry.value));
            parts.collect::<Vec<_>>().join("\n")
        }
        Value::Map(map) => {
            let mut pairs: Vec<String> = map
                .iter()
                .map(|(name, entry)| format!("{name}={}", means(shape, &entry.value)))
                .collect();
            pairs.sort();
            pairs.join("\n")
        }
        other => in_words(other),
    }
}

fn quantity_means(quantity: &Quantity) -> String {
    let dimension = quantity.unit.dimension().si_unit();
    match quantity.value_si(None) {
        Ok(value) if quantity.unit.is_one() => float::shortest(value),
        Ok(value) => format!("{} {dimension}", float::shortest(value)),
        // A gauge pressure: its unit is a part of its meaning.
        Err(_) => format!(
            "{} {}",
            float::shortest(quantity.value),
            quantity.unit.text()
        ),
    }
}

fn file_words(bytes: &[u8]) -> String {
    format!(
        "{} bytes, sha256:{}…",
        bytes.len(),
        Digest::of(bytes).first_8()
    )
}
