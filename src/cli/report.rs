//! What a person reads on the terminal: finding first, then criteria, results, evidence.

use crate::pipeline::{Issued, Trial};
use crate::record::Subject;
use crate::record::terminal::{self, Line};

/// The report of a solved problem.
pub fn trial(trial: &Trial) -> String {
    let subject = Subject {
        model: &trial.model,
        cases: &trial.cases,
        verdict: &trial.verdict,
    };
    let mut text = String::new();
    for line in terminal::lines(&subject) {
        match line {
            Line::Words(words) => text.push_str(&words),
            Line::Table(rows) => text.push_str(table(&rows).trim_end()),
        }
        text.push('\n');
    }
    text
}

/// Where the package stands, and its two digests.
pub fn issued(issued: &Issued) -> String {
    let note = if issued.respelled {
        "\n                (number or revision hold characters unfit for file names)"
    } else {
        ""
    };
    format!(
        "\nPackage         {}{note}\nFingerprint     {}\nPackage digest  {}\n",
        issued.package.display(),
        issued.fingerprint.prefixed(),
        issued.package_digest.prefixed()
    )
}

/// Columns as wide as their widest cell; the first column indented.
fn table(rows: &[Vec<String>]) -> String {
    let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
    let widths: Vec<usize> = (0..columns)
        .map(|column| {
            rows.iter()
                .filter_map(|row| row.get(column))
                .map(|cell| cell.chars().count())
                .max()
                .unwrap_or(0)
        })
        .collect();
    let mut text = String::new();
    for row in rows {
        let cells: Vec<String> = row
            .iter()
            .zip(&widths)
            .map(|(cell, width)| format!("{cell}{}", " ".repeat(width - cell.chars().count())))
            .collect();
        text.push_str(format!("  {}", cells.join("  ")).trim_end());
        text.push('\n');
    }
    text
}
