//! The register of calculations: which packages there are, what each finds, and which no longer stand.
//!
//! Owns: the entries, what is flagged, the table. Does not own: finding and opening the packages.

use std::collections::BTreeMap;

use super::results::{self, Results};
use super::table::Table;
use super::{
    DATE_FIELD, NUMBER_FIELD, REVISION_FIELD, STANDING_FIELD, SUPERSEDES_FIELD, TITLE_FIELD, field,
};
use crate::package::bag::{self, Bag, Glance};
use crate::package::finding::Finding;

/// Files that a quick look at a package reads.
pub const GLANCED: [&str; 5] = [
    bag::DECLARATION,
    bag::INFO,
    bag::MANIFEST,
    bag::TAG_MANIFEST,
    "data/results/results.json",
];

/// What the register knows of one package.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Entry {
    /// Below the folder that is listed.
    pub path: String,
    pub number: String,
    pub title: String,
    pub revision: String,
    pub standing: String,
    pub date: String,
    pub finding: String,
    pub fingerprint: String,
    pub supersedes: Option<String>,
    /// Why the package is broken; the first reason stands for all.
    pub broken: Option<String>,
}

/// All packages below a folder.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Register {
    pub entries: Vec<Entry>,
    /// What could not be looked at, one line each.
    pub remarks: Vec<String>,
}

impl Entry {
    pub fn broken(path: &str, findings: &[Finding]) -> Entry {
        Entry {
            path: path.to_owned(),
            broken: Some(reason(findings.iter().map(ToString::to_string).collect())),
            ..Entry::default()
        }
    }

    /// From the tag files and results.json alone.
    pub fn of_glance(path: &str, glance: &Glance) -> Entry {
        let fingerprint = bag::fingerprint_of_manifest(&glance.manifest).prefixed();
        let results = glance.payload(results::PATH);
        Entry::from_parts(path, &glance.info, fingerprint, results)
    }

    /// From a package of which every byte was hashed.
    pub fn of_bag(path: &str, found: &Bag) -> Entry {
        let fingerprint = found.content_fingerprint().prefixed();
        let mut payload = found.payload();
        let results = payload.find(|(path, _)| *path == results::PATH);
        Entry::from_parts(
            path,
            found.info(),
            fingerprint,
            results.map(|(_, bytes)| bytes),
        )
    }

    fn from_parts(
        path: &str,
        info: &[(String, String)],
        fingerprint: String,
        results: Option<&[u8]>,
    ) -> Entry {
        let said = |label: &str| field(info, label).unwrap_or_default().to_owned();
        let (finding, broken) = match Results::parse(results) {
            Ok(results) => (results.finding, None),
            Err(fault) => (String::new(), Some(fault.to_string())),
        };
        Entry {
            path: path.to_owned(),
            number: said(NUMBER_FIELD),
            title: said(TITLE_FIELD),
            revision: said(REVISION_FIELD),
            standing: said(STANDING_FIELD),
            date: said(DATE_FIELD),
            finding,
            fingerprint,
            supersedes: field(info, SUPERSEDES_FIELD).map(str::to_owned),
            broken,
        }
    }
}

impl Register {
    pub fn n_broken(&self) -> usize {
        let entries = self.entries.iter();
        entries.filter(|entry| entry.broken.is_some()).count()
    }

    /// One row a package, with what is wrong with it: for files.
    pub fn table(&self) -> Table {
        let head = [
            "number",
            "revision",
            "standing",
            "finding",
            "title",
            "date",
            "superseded by",
            "flags",
            "fingerprint",
            "package",
        ];
        let mut table = Table::new("", &head);
        table.rows = self.rows(|entry, successor, flags| {
            vec![
                entry.number.clone(),
                entry.revision.clone(),
                entry.standing.clone(),
                entry.finding.clone(),
                entry.title.clone(),
                entry.date.clone(),
                successor,
                flags,
                entry.fingerprint.clone(),
                entry.path.clone(),
            ]
        });
        table
    }

    /// The same for a terminal: no date, and of each fingerprint the digits that also stand in names of folders.
    pub fn overview(&self) -> Table {
        let head = [
            "number",
            "revision",
            "standing",
            "finding",
            "superseded by",
            "flags",
            "content",
            "title",
            "package",
        ];
        let mut table = Table::new("", &head);
        table.rows = self.rows(|entry, successor, flags| {
            let digits = entry.fingerprint.trim_start_matches("sha256:");
            vec![
                entry.number.clone(),
                entry.revision.clone(),
                entry.standing.clone(),
                entry.finding.clone(),
                successor,
                flags,
                digits.chars().take(8).collect(),
                entry.title.clone(),
                entry.path.clone(),
            ]
        });
        table
    }

    /// A row for each entry, from the entry, what supersedes it, and its flags.
    fn rows(&self, row: impl Fn(&Entry, String, String) -> Vec<String>) -> Vec<Vec<String>> {
        let successors = self.successors();
        let twins = self.twins();
        let one = |entry: &Entry| {
            let successor = successors.get(entry.fingerprint.as_str());
            let mut flags = Vec::new();
            if let Some(reason) = &entry.broken {
                flags.push(format!("broken: {reason}"));
            }
            if successor.is_some() {
                flags.push("superseded".to_owned());
            }
            if twins.get(&twin_key(entry)).is_some_and(|count| *count > 1) {
                flags.push("number and revision issued more than once".to_owned());
            }
            row(
                entry,
                successor.cloned().unwrap_or_default(),
                flags.join("; "),
            )
        };
        self.entries.iter().map(one).collect()
    }

    /// Who supersedes a fingerprint: number and revision of those that name it.
    fn successors(&self) -> BTreeMap<&str, String> {
        let mut successors: BTreeMap<&str, String> = BTreeMap::new();
        for entry in &self.entries {
            let Some(old) = &entry.supersedes else {
                continue;
            };
            let name = format!("{} {}", entry.number, entry.revision);
            successors
                .entry(old.as_str())
                .and_modify(|names| {
                    if !names.split(", ").any(|other| other == name) {
                        names.push_str(&format!(", {name}"));
                    }
                })
                .or_insert(name);
        }
        successors
    }

    /// How many different calculations were issued under one number and revision; copies of one count once.
    fn twins(&self) -> BTreeMap<(&str, &str), usize> {
        let mut fingerprints: BTreeMap<(&str, &str), Vec<&str>> = BTreeMap::new();
        let issued = self
            .entries
            .iter()
            .filter(|entry| entry.standing == "issued");
        for entry in issued {
            let list = fingerprints.entry(twin_key(entry)).or_default();
            if !list.contains(&entry.fingerprint.as_str()) {
                list.push(&entry.fingerprint);
            }
        }
        let counts = fingerprints.into_iter();
        counts.map(|(key, list)| (key, list.len())).collect()
    }
}

fn twin_key(entry: &Entry) -> (&str, &str) {
    (&entry.number, &entry.revision)
}

fn reason(lines: Vec<String>) -> String {
    match lines.as_slice() {
        [] => "unknown".to_owned(),
        [only] => only.clone(),
        [first, rest @ ..] => format!("{first} (and {} more)", rest.len()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn entry(number: &str, revision: &str, fingerprint: &str, supersedes: Option<&str>) -> Entry {
        Entry {
            number: number.to_owned(),
            revision: revision.to_owned(),
            standing: "issued".to_owned(),
            fingerprint: fingerprint.to_owned(),
            supersedes: supersedes.map(str::to_owned),
            ..Entry::default()
        }
    }

    fn column(register: &Register, name: &str) -> Vec<String> {
        let table = register.table();
        let index = table.head.iter().position(|head| *head == name).unwrap();
        table.rows.iter().map(|row| row[index].clone()).collect()
    }

    #[test]
    fn hand_superseded_and_doubly_issued_packages_are_flagged() {
        let register = Register {
            entries: vec![
                entry("N", "A", "1", None),
                entry("N", "B", "2", Some("1")),
                entry("M", "A", "3", None),
                entry("M", "A", "4", None),
                entry("L", "A", "5", None),
                entry("L", "A", "5", None),
            ],
            remarks: Vec::new(),
        };
        assert_eq!(
            column(&register, "superseded by"),
            ["N B", "", "", "", "", ""]
        );
        let twice = "number and revision issued more than once";
        assert_eq!(
            column(&register, "flags"),
            ["superseded", "", twice, twice, "", ""]
        );
        assert_eq!(register.n_broken(), 0);
    }

    #[test]
    fn hand_a_broken_package_is_listed_with_its_reason() {
        let findings = [
            Finding::TooManyEntries { limit: 1 },
            Finding::TooManyEntries { limit: 2 },
        ];
        let register = Register {
            entries: vec![Entry::broken("p", &findings)],
            remarks: Vec::new(),
        };
        assert_eq!(register.n_broken(), 1);
        let flags = column(&register, "flags");
        assert!(flags[0].starts_with("broken: ") && flags[0].ends_with("(and 1 more)"));
    }
}
