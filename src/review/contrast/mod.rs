//! Contrast: what changed between two calculations, and what it did to results and findings.
//!
//! Owns: the comparison and its words. `inputs` alone answers whether a calculation was changed after its check.
//! Compared are what the packages state; whether they are what their inputs give is for `recheck` to say.

mod changes;
mod outcome;

use crate::package::bag::Bag;
use crate::review::results::Results;
use crate::review::table::{Table, in_markdown, plain};
use crate::review::{Identity, SUPERSEDES_FIELD, field};

pub use changes::{Change, Changes, Statement, Topic, inputs};
pub use outcome::{CriterionChange, ResultChange};

/// One of the two packages: what it is, states and found.
pub struct Side<'a> {
    pub bag: &'a Bag,
    pub statement: Statement<'a>,
    pub results: Results,
}

/// Everything that differs between two packages.
#[derive(Clone, Debug)]
pub struct Contrast {
    pub old: Identity,
    pub new: Identity,
    /// Content fingerprint that the new package says it replaces.
    pub supersedes: Option<String>,
    /// Finding of the whole, before and after.
    pub finding: (String, String),
    pub changes: Changes,
    pub results: Vec<ResultChange>,
    pub n_results_same: usize,
    pub criteria: Vec<CriterionChange>,
    pub n_criteria_same: usize,
}

/// Compares two packages.
pub fn contrast(old: &Side, new: &Side) -> Contrast {
    let (results, n_results_same) = outcome::results(&old.results, &new.results);
    let (criteria, n_criteria_same) = outcome::criteria(&old.results, &new.results);
    Contrast {
        old: Identity::of(old.bag),
        new: Identity::of(new.bag),
        supersedes: field(new.bag.info(), SUPERSEDES_FIELD).map(str::to_owned),
        finding: (old.results.finding.clone(), new.results.finding.clone()),
        changes: inputs(&old.statement, &new.statement),
        results,
        n_results_same,
        criteria,
        n_criteria_same,
    }
}

impl Contrast {
    /// For a terminal: findings first, then results, then what was changed.
    pub fn terminal(&self) -> String {
        let mut text = self.lines().join("\n");
        text.push('\n');
        for table in self.tables(Texts::WhereTheyPart) {
            text.push('\n');
            text.push_str(&table.terminal());
        }
        text
    }

    pub fn markdown(&self) -> String {
        let title = format!("{} and {}", self.old.words(), self.new.words());
        let mut text = format!("# Contrast of {}\n\n", in_markdown(&title));
        for line in self.lines() {
            text.push_str(&format!("- {}\n", in_markdown(&line)));
        }
        for table in self.tables(Texts::Whole) {
            text.push('\n');
            text.push_str(&table.markdown());
        }
        text
    }

    fn lines(&self) -> Vec<String> {
        let (before, after) = &self.finding;
        let finding = if before == after {
            format!("Finding: {}, as before", plain(after))
        } else {
            format!("Finding: {}; before: {}", plain(after), plain(before))
        };
        let replaces = match &self.supersedes {
            Some(fingerprint) if *fingerprint == self.old.fingerprint => {
                "The new package names the old one as superseded.".to_owned()
            }
            Some(fingerprint) => format!("The new package supersedes another one, {fingerprint}."),
            None => "The new package does not say that it supersedes another.".to_owned(),
        };
        let count = |number: usize, one: &str, many: &str| {
            format!("{number} {}", if number == 1 { one } else { many })
        };
        vec![
            finding,
            format!("Old: {}, {}", self.old.words(), self.old.fingerprint),
            format!("New: {}, {}", self.new.words(), self.new.fingerprint),
            replaces,
            format!(
                "{} in what is calculated, {} in roles, dates, standing, comments and spelling.",
                count(self.changes.of_substance.len(), "change", "changes"),
                count(self.changes.apart.len(), "change", "changes"),
            ),
            format!(
                "{}, {} the same; {}, {} the same.",
                count(self.results.len(), "result differs", "results differ"),
                self.n_results_same,
                count(self.criteria.len(), "criterion differs", "criteria differ"),
                self.n_criteria_same,
            ),
        ]
    }

    /// Tables that have rows, the weightiest first.
    fn tables(&self, texts: Texts) -> Vec<Table> {
        let mut tables = vec![
            outcome::criteria_table(&self.criteria),
            outcome::results_table(&self.results),
        ];
        for topic in Topic::ALL {
            let rows = self.changes.of_substance.iter();
            tables.push(changes_table(
                topic.title(),
                rows.filter(|change| change.topic == topic),
                texts,
            ));
        }
        tables.push(changes_table(
            "Roles, dates, standing, comments, revision text and spelling",
            self.changes.apart.iter(),
            texts,
        ));
        tables.retain(|table| !table.rows.is_empty());
        tables
    }
}

/// How long texts are shown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Texts {
    Whole,
    /// What two long texts begin with alike is left out, so that a narrow column shows where they part.
    WhereTheyPart,
}

fn changes_table<'a>(
    title: &str,
    changes: impl Iterator<Item = &'a Change>,
    texts: Texts,
) -> Table {
    let mut table = Table::new(title, &["item", "key", "before", "after"]);
    for change in changes {
        let said = |value: &Option<String>| value.clone().unwrap_or_else(|| "–".to_owned());
        let (mut before, mut after) = (said(&change.before), said(&change.after));
        if texts == Texts::WhereTheyPart {
            (before, after) = from_where_they_part(&before, &after);
        }
        let row = vec![change.item.clone(), change.key.clone(), before, after];
        table.rows.push(row);
    }
    table
}

/// Leaves out what both begin with but for a few words, when they are longer than a column.
fn from_where_they_part(before: &str, after: &str) -> (String, String) {
    const COLUMN: usize = 50;
    const WORDS_KEPT: usize = 3;
    if before.chars().count().max(after.chars().count()) <= COLUMN {
        return (before.to_owned(), after.to_owned());
    }
    let words = |text: &str| text.split(' ').map(str::to_owned).collect::<Vec<_>>();
    let (before, after) = (words(before), words(after));
    let pairs = before.iter().zip(&after);
    let n_alike = pairs.take_while(|(a, b)| a == b).count();
    let first = n_alike.saturating_sub(WORDS_KEPT);
    let rest = |words: &[String]| {
        let rest = words[first..].join(" ");
        if first > 0 {
            format!("… {rest}")
        } else {
            rest
        }
    };
    (rest(&before), rest(&after))
}

#[cfg(test)]
mod tests;
