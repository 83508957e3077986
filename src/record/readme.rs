//! READ-ME.txt: what each file of a package is, how to verify it by hand, the format of the problem file.
//!
//! Readable without the program: the specification of the format is written from the key table.

use super::{PROGRAM, Subject};
use crate::formula::tree::{FUNCTIONS, PROBES, ProbeArguments};
use crate::problem::keys::{PROBLEM, Shape, Table};

/// The text for one calculation.
pub fn read_me(subject: &Subject) -> String {
    let head = &subject.model.head;
    let mut text = format!(
        "{}, revision {}\r\n{}\r\n\r\n\
This folder is a calculation package: a BagIt 1.0 bag (RFC 8493) written by\r\n{PROGRAM}.\r\n\r\n",
        head.number, head.revision, head.title
    );
    text.push_str(
        &include_str!("../../templates/READ-ME.txt")
            .replace("\r\n", "\n")
            .replace('\n', "\r\n")
            .replace("{{file}}", &subject.model.file),
    );
    text.push_str("\r\nTHE PROBLEM FILE, FORMAT 1\r\n==========================\r\n\r\n");
    text.push_str(
        "A TOML 1.0 file. Keys below, by table; * marks required ones. A quantity is a bare\r\n\
(dimensionless) number, or text: a number, one space, a unit. A formula uses + - * / ^, parentheses,\r\n\
comparisons with && || !, if(condition, a, b), number_in(x, \"unit\"), measure(number, \"unit\") and the\r\n\
functions listed at the end; a lookup is called like a function.\r\n",
    );
    let mut done = Vec::new();
    table(&PROBLEM, &mut text, &mut done);
    text.push_str("\r\nFunctions\r\n");
    for entry in FUNCTIONS {
        let arguments = if entry.arity == 1 { "x" } else { "x, y" };
        line(
            &mut text,
            &format!("  {}({arguments})", entry.name),
            entry.doc,
        );
    }
    text.push_str("\r\nFunctions of the whole march, in results\r\n");
    for entry in PROBES {
        let arguments = match entry.arguments {
            ProbeArguments::Expression => "x",
            ProbeArguments::ExpressionAndInstant => "x, t",
            ProbeArguments::Event => "event",
            ProbeArguments::Condition => "condition",
        };
        line(
            &mut text,
            &format!("  {}({arguments})", entry.name),
            entry.doc,
        );
    }
    text
}

fn line(text: &mut String, name: &str, doc: &str) {
    text.push_str(&format!("{name:<28} {doc}\r\n"));
}

fn table(table_of: &'static Table, text: &mut String, done: &mut Vec<&'static str>) {
    if done.contains(&table_of.name) {
        return;
    }
    done.push(table_of.name);
    let title = if table_of.name.is_empty() {
        "Top level".to_owned()
    } else {
        format!("[{}]", table_of.name)
    };
    text.push_str(&format!("\r\n{title}  {}\r\n", table_of.doc));
    for key in table_of.keys {
        let mark = if key.required { "*" } else { " " };
        line(
            text,
            &format!(" {mark}{}", key.name),
            &format!("{}: {}", shape(key.shape), key.doc),
        );
    }
    for key in table_of.keys {
        if let Shape::Section(inner) | Shape::Sections(inner) = key.shape {
            table(inner, text, done);
        }
    }
}

fn shape(shape: Shape) -> String {
    match shape {
        Shape::Text | Shape::Id => "text".to_owned(),
        Shape::Word(words) => words
            .iter()
            .map(|word| format!("\"{word}\""))
            .collect::<Vec<_>>()
            .join(" | "),
        Shape::Symbol => "symbol".to_owned(),
        Shape::Integer(..) => "whole number".to_owned(),
        Shape::Number(..) => "number".to_owned(),
        Shape::Truth => "true | false".to_owned(),
        Shape::Date => "date".to_owned(),
        Shape::Quantity => "quantity".to_owned(),
        Shape::Expression => "quantity or formula of inputs".to_owned(),
        Shape::Formula => "formula".to_owned(),
        Shape::Unit => "unit".to_owned(),
        Shape::Path => "file".to_owned(),
        Shape::Digest => "sha256:…".to_owned(),
        Shape::Bounds => "[lower, upper]".to_owned(),
        Shape::Texts => "[text, …]".to_owned(),
        Shape::Points => "[[x, y], …]".to_owned(),
        Shape::Assignments => "{ symbol = value, … }".to_owned(),
        Shape::Names => "{ symbol = name, … }".to_owned(),
        Shape::Section(_) => "table".to_owned(),
        Shape::Sections(_) => "tables".to_owned(),
    }
}
