//! `countermarch units`, `methods`, `functions`, `limits`, `keys`, `codes`: what is available, from the same tables that the
//! program works with.

use crate::calculation;
use crate::diagnostic::CODES;
use crate::formula::parse;
use crate::formula::tree::{FUNCTIONS, PROBES, ProbeArguments};
use crate::march;
use crate::package::Limits;
use crate::problem::keys::{PROBLEM, Shape, Table};
use crate::problem::{read, resolve, schema};
use crate::review::work;
use crate::units;
use crate::world;

/// Rows of cells to columns as wide as their widest cell.
fn columns(rows: &[Vec<String>]) -> String {
    let count = rows.iter().map(Vec::len).max().unwrap_or(0);
    let width = |column: usize| {
        rows.iter()
            .filter(|row| column + 1 < row.len())
            .map(|row| row[column].chars().count())
            .max()
            .unwrap_or(0)
    };
    let widths: Vec<usize> = (0..count).map(width).collect();
    let mut text = String::new();
    for row in rows {
        let cells: Vec<String> = row
            .iter()
            .zip(&widths)
            .map(|(cell, width)| {
                format!(
                    "{cell}{}",
                    " ".repeat(width.saturating_sub(cell.chars().count()))
                )
            })
            .collect();
        text.push_str(cells.join("  ").trim_end());
        text.push('\n');
    }
    text
}

/// Every unit with its name, factor to SI and source; then the prefixes.
pub fn units() -> String {
    let rows: Vec<Vec<String>> = units::catalogue()
        .map(|entry| {
            let prefixes = if entry.accepts_prefixes {
                "prefixes"
            } else {
                ""
            };
            vec![
                entry.symbol.to_owned(),
                entry.name.to_owned(),
                entry.dimension().si_unit(),
                prefixes.to_owned(),
                entry.source.to_owned(),
            ]
        })
        .collect();
    let prefixes: Vec<String> = units::prefixes()
        .map(|prefix| prefix.symbol.to_owned())
        .collect();
    format!(
        "{}\nPrefixes: {}\nProducts m*s, quotients m/s, powers m^2, m^(1/2); one slash, the rest in parentheses: kW/(m^2*K).\n",
        columns(&rows),
        prefixes.join(" ")
    )
}

/// Every method with order, slope evaluations a step and citation.
pub fn methods() -> String {
    let rows: Vec<Vec<String>> = march::METHODS
        .iter()
        .map(|method| {
            let kind = if method.is_implicit() {
                "implicit"
            } else {
                "explicit"
            };
            vec![
                format!("\"{}\"", method.name),
                format!("order {}", method.order),
                kind.to_owned(),
                method.title.to_owned(),
                method.citation.to_owned(),
            ]
        })
        .collect();
    columns(&rows)
}

/// Every function of formulas and of results.
pub fn functions() -> String {
    let mut rows: Vec<Vec<String>> = FUNCTIONS
        .iter()
        .map(|entry| {
            vec![
                format!(
                    "{}({})",
                    entry.name,
                    if entry.arity == 1 { "x" } else { "x, y" }
                ),
                entry.doc.to_owned(),
            ]
        })
        .collect();
    rows.push(vec![
        "if(condition, a, b)".to_owned(),
        "a where the condition holds, else b".to_owned(),
    ]);
    rows.push(vec![
        "number_in(x, \"unit\")".to_owned(),
        "plain number of x in a unit, for empirical formulas".to_owned(),
    ]);
    rows.push(vec![
        "measure(5.7, \"unit\")".to_owned(),
        "a plain number given a unit, for empirical formulas".to_owned(),
    ]);
    let probes: Vec<Vec<String>> = PROBES
        .iter()
        .map(|entry| {
            let arguments = match entry.arguments {
                ProbeArguments::Expression => "x",
                ProbeArguments::ExpressionAndInstant => "x, t",
                ProbeArguments::Event => "event",
                ProbeArguments::Condition => "condition",
            };
            vec![format!("{}({arguments})", entry.name), entry.doc.to_owned()]
        })
        .collect();
    format!("{}\nIn results:\n{}", columns(&rows), columns(&probes))
}

/// Every stated limit.
pub fn limits() -> String {
    let limit = |what: &str, number: String| vec![what.to_owned(), number];
    let rows = vec![
        limit("problem file, bytes", read::MAX_BYTES.to_string()),
        limit(
            "entries of one kind (inputs, results, …)",
            read::MAX_ENTRIES.to_string(),
        ),
        limit("states", resolve::MAX_STATES.to_string()),
        limit("points of a lookup", resolve::MAX_POINTS.to_string()),
        limit("formula, bytes", parse::MAX_LENGTH.to_string()),
        limit(
            "formula, depth of parentheses",
            parse::MAX_DEPTH.to_string(),
        ),
        limit("levels of the ladder", "8".to_owned()),
        limit("steps of one march", march::STEP_LIMIT.to_string()),
        limit(
            "occurrences of events kept with their rows",
            march::OCCURRENCE_LIMIT.to_string(),
        ),
        limit(
            "sets of one event within one step",
            march::SET_LIMIT.to_string(),
        ),
        limit(
            "rows of a printed history",
            calculation::MAX_REPORT_ROWS.to_string(),
        ),
        limit(
            "package: files and folders",
            Limits::READ.n_entries.to_string(),
        ),
        limit(
            "package: bytes of one file",
            Limits::READ.file_bytes.to_string(),
        ),
        limit(
            "package: bytes in all",
            Limits::READ.total_bytes.to_string(),
        ),
        limit(
            "recheck: operations without --allow-work",
            work::DEFAULT_LIMIT.to_string(),
        ),
        limit(
            "register: files and folders looked at",
            world::TREE_ENTRIES.to_string(),
        ),
    ];
    columns(&rows)
}

/// Every key of the problem file, table by table, or its JSON Schema.
pub fn keys(as_schema: bool) -> String {
    if as_schema {
        return schema::schema();
    }
    let mut text = String::new();
    table(&PROBLEM, &mut text, &mut Vec::new());
    text
}

fn table(of: &'static Table, text: &mut String, done: &mut Vec<&'static str>) {
    if done.contains(&of.name) {
        return;
    }
    done.push(of.name);
    text.push_str(&format!(
        "{}  {}\n",
        if of.name.is_empty() {
            "(top level)".to_owned()
        } else {
            format!("[{}]", of.name)
        },
        of.doc
    ));
    let rows: Vec<Vec<String>> = of
        .keys
        .iter()
        .map(|key| {
            vec![
                format!("  {}", key.name),
                if key.required { "required" } else { "" }.to_owned(),
                key.doc.to_owned(),
                key.example.to_owned(),
            ]
        })
        .collect();
    text.push_str(&columns(&rows));
    text.push('\n');
    for key in of.keys {
        if let Shape::Section(inner) | Shape::Sections(inner) = key.shape {
            table(inner, text, done);
        }
    }
}

/// Every diagnostic code.
pub fn codes() -> String {
    let rows: Vec<Vec<String>> = CODES
        .iter()
        .map(|code| vec![code.id.to_owned(), code.title.to_owned()])
        .collect();
    columns(&rows)
}
