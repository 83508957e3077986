//! bag-info.txt: one line a field, `label`, colon, space, value; never folded.

use crate::package::finding::{BagFault, LineFault};
use crate::package::name;

/// Fields of bag-info.txt are few; a file with more lines is not ours.
const N_LINES_LIMIT: usize = 1_000;

pub fn write(fields: &[(String, String)]) -> String {
    fields
        .iter()
        .map(|(label, value)| format!("{label}: {value}\n"))
        .collect()
}

/// Reads the text of bag-info.txt; every line must be as `write` would spell it, each label once.
pub fn parse(text: &str) -> Result<Vec<(String, String)>, Vec<BagFault>> {
    let file = super::INFO;
    let mut fields: Vec<(String, String)> = Vec::new();
    let mut faults = Vec::new();
    if text.lines().count() > N_LINES_LIMIT {
        return Err(vec![BagFault::TooManyLines {
            file,
            limit: N_LINES_LIMIT,
        }]);
    }
    for (line, number) in text.split_terminator('\n').zip(1..) {
        match parse_line(line) {
            Ok((label, _))
                if fields
                    .iter()
                    .any(|(earlier, _)| earlier.eq_ignore_ascii_case(label)) =>
            {
                faults.push(BagFault::InfoTwice {
                    label: label.to_owned(),
                });
            }
            Ok((label, value)) => fields.push((label.to_owned(), value.to_owned())),
            Err(fault) => faults.push(BagFault::Line {
                file,
                number,
                fault,
            }),
        }
    }
    if !text.is_empty() && !text.ends_with('\n') {
        faults.push(BagFault::NoFinalLineBreak { file });
    }
    if faults.is_empty() {
        Ok(fields)
    } else {
        Err(faults)
    }
}

/// A label is ASCII letters, digits and hyphens, so that nothing in it can end it early.
pub fn label_is_sound(label: &str) -> bool {
    !label.is_empty()
        && label
            .bytes()
            .all(|byte| byte.is_ascii_alphanumeric() || byte == b'-')
}

/// A value stays on its line and is shown as it is: a line break would begin another field.
pub fn value_is_sound(value: &str) -> bool {
    !value.is_empty() && value.trim() == value && !value.chars().any(name::is_hidden)
}

fn parse_line(line: &str) -> Result<(&str, &str), LineFault> {
    if line.contains('\r') {
        return Err(LineFault::CarriageReturn);
    }
    if line.starts_with([' ', '\t']) {
        return Err(LineFault::Folded);
    }
    let (label, value) = line.split_once(": ").ok_or(LineFault::NoLabel)?;
    if !label_is_sound(label) {
        return Err(LineFault::NoLabel);
    }
    if !value_is_sound(value) {
        return Err(LineFault::Value);
    }
    Ok((label, value))
}
