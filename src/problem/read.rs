//! TOML text to sections that have the shape of the key table, with positions; all faults at once.
//!
//! Owns: encoding, syntax, known keys, types, required keys. Does not own: what values mean (`resolve`).
//! Not read with serde: it stops at the first fault and loses positions.

use std::collections::BTreeMap;
use std::ops::Range;

use chrono::NaiveDate;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::keys::{Key, PROBLEM, Shape, Table};
use crate::diagnostic::{
    BAD_DATE, BAD_DIGEST, BAD_PATH, BAD_POINTS, BAD_SYMBOL, Diagnostic, EMPTY_TEXT, INVISIBLE,
    MISSING_KEY, NOT_A_WORD, NOT_FINITE, NOT_TEXT, NOT_TOML, OUT_OF_RANGE, Place, RESERVED_NAME,
    TOO_LARGE, TOO_MANY, UNKNOWN_FORMAT, UNKNOWN_KEY, WRONG_TYPE, suggestion,
};
use crate::formula::tree::is_reserved;

/// Largest problem file, in bytes.
pub const MAX_BYTES: usize = 1 << 20;
/// Most entries of one kind (inputs, states, …).
pub const MAX_ENTRIES: usize = 10_000;
/// Faults after which reading stops: a file with more is another kind of file.
const MAX_FAULTS: usize = 200;

/// A table of the file, checked against its key table.
#[derive(Clone, Debug)]
pub struct Section {
    pub table: &'static Table,
    pub span: Range<usize>,
    entries: BTreeMap<&'static str, Entry>,
}

/// A value and where it stands.
#[derive(Clone, Debug)]
pub struct Entry {
    pub value: Value,
    pub span: Range<usize>,
    /// Byte of the file at which a text begins, when it stands there letter for letter (no escapes).
    pub text_start: Option<usize>,
}

#[derive(Clone, Debug)]
pub enum Value {
    Text(String),
    Integer(i64),
    Number(f64),
    Truth(bool),
    Date(NaiveDate),
    List(Vec<Entry>),
    Points(Vec<(f64, f64)>),
    Map(Vec<(String, Entry)>),
    Section(Section),
    Sections(Vec<Section>),
}

/// Reads `bytes` as a problem file called `file`.
///
/// # Errors
/// Every fault found, with places; nothing is read from a file with a fault.
pub fn read(file: &str, bytes: &[u8]) -> Result<(String, Section), Vec<Diagnostic>> {
    let text = decode(file, bytes)?;
    let (table, errors) = DeTable::parse_recoverable(&text);
    let mut faults: Vec<Diagnostic> = errors
        .iter()
        .take(MAX_FAULTS)
        .map(|error| {
            let span = error.span().unwrap_or(0..0);
            Diagnostic::new(
                &NOT_TOML,
                error.message().lines().collect::<Vec<_>>().join(" ")).at(Place::new(file, span)).mend("mend the syntax here or just before; texts stand in quotation marks, tables in brackets")
        })
        .collect();
    if !faults.is_empty() {
        // Faults of content would mostly be echoes of broken syntax.
        return Err(faults);
    }
    let mut reader = Reader {
        file,
        text: &text,
        faults: &mut faults,
    };
    let section = reader.section(&PROBLEM, table.get_ref(), 0..0);
    if faults.is_empty() {
        Ok((text, section))
    } else {
        Err(faults)
    }
}

fn decode(file: &str, bytes: &[u8]) -> Result<String, Vec<Diagnostic>> {
    if bytes.len() > MAX_BYTES {
        let message = format!(
            "the file has {} bytes; a problem file has at most {MAX_BYTES}",
            bytes.len()
        );
        return Err(vec![
            Diagnostic::new(&TOO_LARGE, message)
                .at(Place::new(file, 0..0))
                .mend("put tables into CSV files and name them"),
        ]);
    }
    let text = String::from_utf8(bytes.to_vec()).map_err(|error| {
        let at = error.utf8_error().valid_up_to();
        vec![
            Diagnostic::new(&NOT_TEXT, format!("byte {at} is not UTF-8"))
                .at(Place::new(file, 0..0))
                .mend("save the file as UTF-8"),
        ]
    })?;
    let hidden: Vec<Diagnostic> = text
        .char_indices()
        .filter(|(_, c)| is_invisible(*c))
        .take(20)
        .map(|(at, c)| {
            Diagnostic::new(
                &INVISIBLE,
                format!(
                    "the character U+{:04X} cannot be seen and could mislead a reader",
                    c as u32
                ),
            )
            .at(Place::new(file, at..at + c.len_utf8()))
            .mend("delete it")
        })
        .collect();
    if hidden.is_empty() {
        Ok(text)
    } else {
        Err(hidden)
    }
}

/// Characters that change what a reader sees without being seen: controls, zero-width and bidirectional marks.
pub fn is_invisible(c: char) -> bool {
    matches!(c, '\u{0}'..='\u{8}' | '\u{b}' | '\u{c}' | '\u{e}'..='\u{1f}' | '\u{7f}'..='\u{9f}' | '\u{ad}' | '\u{61c}')
        || matches!(c, '\u{180e}' | '\u{200b}'..='\u{200f}' | '\u{202a}'..='\u{202e}' | '\u{2060}'..='\u{206f}')
        || matches!(c, '\u{feff}' | '\u{fff9}'..='\u{fffb}' | '\u{e0000}'..='\u{e007f}')
}

impl Section {
    pub fn entry(&self, key: &str) -> Option<&Entry> {
        debug_assert!(
            self.table.key(key).is_some(),
            "no key {key} in {}",
            self.table.title()
        );
        self.entries.get(key)
    }

    pub fn text(&self, key: &str) -> Option<&str> {
        self.entry(key)?.text()
    }

    /// The text of a required key; empty if the file lacks it, which `read` has reported.
    pub fn required(&self, key: &str) -> String {
        self.text(key).unwrap_or_default().to_owned()
    }

    pub fn owned(&self, key: &str) -> Option<String> {
        self.text(key).map(str::to_owned)
    }

    pub fn truth(&self, key: &str) -> Option<bool> {
        match self.entry(key)?.value {
            Value::Truth(truth) => Some(truth),
            _ => None,
        }
    }

    pub fn integer(&self, key: &str) -> Option<i64> {
        match self.entry(key)?.value {
            Value::Integer(integer) => Some(integer),
            _ => None,
        }
    }

    pub fn number(&self, key: &str) -> Option<f64> {
        match self.entry(key)?.value {
            Value::Number(number) => Some(number),
            Value::Integer(integer) => Some(integer as f64),
            _ => None,
        }
    }

    pub fn date(&self, key: &str) -> Option<NaiveDate> {
        match self.entry(key)?.value {
            Value::Date(date) => Some(date),
            _ => None,
        }
    }

    pub fn section(&self, key: &str) -> Option<&Section> {
        match &self.entry(key)?.value {
            Value::Section(section) => Some(section),
            _ => None,
        }
    }

    pub fn sections(&self, key: &str) -> &[Section] {
        match self.entry(key).map(|entry| &entry.value) {
            Some(Value::Sections(sections)) => sections,
            _ => &[],
        }
    }

    pub fn list(&self, key: &str) -> &[Entry] {
        match self.entry(key).map(|entry| &entry.value) {
            Some(Value::List(list)) => list,
            _ => &[],
        }
    }

    pub fn map(&self, key: &str) -> &[(String, Entry)] {
        match self.entry(key).map(|entry| &entry.value) {
            Some(Value::Map(map)) => map,
            _ => &[],
        }
    }

    /// Where `key` stands, or the section if it is absent.
    pub fn place_of(&self, key: &str) -> Range<usize> {
        self.entry(key)
            .map_or_else(|| self.span.clone(), |entry| entry.span.clone())
    }
}

impl Entry {
    pub fn text(&self) -> Option<&str> {
        match &self.value {
            Value::Text(text) => Some(text),
            _ => None,
        }
    }

    /// The file's range of a range inside this text; the whole value where the text has escapes.
    pub fn range_of(&self, inner: &Range<usize>) -> Range<usize> {
        match self.text_start {
            Some(start) => start + inner.start..start + inner.end,
            None => self.span.clone(),
        }
    }
}

struct Reader<'a> {
    file: &'a str,
    text: &'a str,
    faults: &'a mut Vec<Diagnostic>,
}

impl Reader<'_> {
    fn fault(&mut self, diagnostic: Diagnostic, span: &Range<usize>) {
        if self.faults.len() < MAX_FAULTS {
            self.faults
                .push(diagnostic.at(Place::new(self.file, span.clone())));
        }
    }

    fn section(
        &mut self,
        table: &'static Table,
        found: &DeTable<'_>,
        span: Range<usize>,
    ) -> Section {
        let mut entries = BTreeMap::new();
        for (name, value) in found {
            match table.key(name.get_ref()) {
                Some(key) => {
                    if let Some(entry) = self.entry(key, value) {
                        entries.insert(key.name, entry);
                    }
                }
                None => {
                    let names = table.keys.iter().map(|key| key.name);
                    let otherwise = format!(
                        "{} takes: {}",
                        table.title(),
                        names.clone().collect::<Vec<_>>().join(", ")
                    );
                    let mend = suggestion(name.get_ref(), names, &otherwise);
                    self.fault(
                        Diagnostic::new(
                            &UNKNOWN_KEY,
                            format!("unknown key `{}` in {}", name.get_ref(), table.title()),
                        )
                        .mend(mend),
                        &name.span(),
                    );
                }
            }
        }
        for key in table.keys.iter().filter(|key| key.required) {
            if !found.iter().any(|(name, _)| name.get_ref() == key.name) {
                let mend = if key.example.is_empty() {
                    format!("add [{}]: {}", key.name, key.doc)
                } else {
                    format!("add a line like: {} = {}", key.name, key.example)
                };
                self.fault(
                    Diagnostic::new(
                        &MISSING_KEY,
                        format!("{} lacks `{}`: {}", table.title(), key.name, key.doc),
                    )
                    .mend(mend),
                    &span,
                );
            }
        }
        Section {
            table,
            span,
            entries,
        }
    }

    fn entry(&mut self, key: &'static Key, found: &Spanned<DeValue<'_>>) -> Option<Entry> {
        let span = found.span();
        let value = self.value(key, key.shape, found)?;
        let text_start = match &value {
            Value::Text(text) => self.text_start(&span, text),
            _ => None,
        };
        Some(Entry {
            value,
            span,
            text_start,
        })
    }

    /// Where the letters of a text begin, if the file holds them unescaped.
    fn text_start(&self, span: &Range<usize>, text: &str) -> Option<usize> {
        let raw = self.text.get(span.clone())?;
        let quotes = raw.len() - raw.trim_start_matches(['"', '\'']).len();
        let start = span.start + quotes.min(3);
        (self.text.get(start..start + text.len())? == text).then_some(start)
    }

    fn wrong_type(&mut self, key: &Key, expected: &str, found: &Spanned<DeValue<'_>>) {
        let what = match found.get_ref() {
            DeValue::String(_) => "text",
            DeValue::Integer(_) => "a whole number",
            DeValue::Float(_) => "a number",
            DeValue::Boolean(_) => "true or false",
            DeValue::Datetime(_) => "a date or time",
            DeValue::Array(_) => "an array",
            DeValue::Table(_) => "a table",
        };
        let mend = if key.example.is_empty() {
            String::new()
        } else {
            format!("write it like: {} = {}", key.name, key.example)
        };
        self.fault(
            Diagnostic::new(
                &WRONG_TYPE,
                format!("`{}` takes {expected}, not {what}", key.name),
            )
            .mend(mend),
            &found.span(),
        );
    }

    fn value(
        &mut self,
        key: &'static Key,
        shape: Shape,
        found: &Spanned<DeValue<'_>>,
    ) -> Option<Value> {
        match shape {
            Shape::Text | Shape::Id | Shape::Formula | Shape::Unit => self.free_text(key, found),
            Shape::Word(words) => self.word(key, words, found),
            Shape::Symbol => self.symbol(key, found),
            Shape::Path => self.path(key, found),
            Shape::Digest => self.digest(key, found),
            Shape::Date => self.date(key, found),
            Shape::Truth => match found.get_ref() {
                DeValue::Boolean(truth) => Some(Value::Truth(*truth)),
                _ => {
                    self.wrong_type(key, "true or false", found);
                    None
                }
            },
            Shape::Integer(low, high) => self.integer(key, low, high, found),
            Shape::Number(low, high) => self.number_between(key, low, high, found),
            Shape::Quantity | Shape::Expression => self.expression(key, found),
            Shape::Bounds => self.bounds(key, found),
            Shape::Texts => self.texts(key, found),
            Shape::Points => self.points(key, found),
            Shape::Assignments => {
                self.assignments(key, found, |reader, entry| reader.expression(key, entry))
            }
            Shape::Names => {
                self.assignments(key, found, |reader, entry| reader.free_text(key, entry))
            }
            Shape::Section(table) => match found.get_ref() {
                DeValue::Table(inner) => {
                    Some(Value::Section(self.section(table, inner, found.span())))
                }
                _ => {
                    self.wrong_type(key, "a table", found);
                    None
                }
            },
            Shape::Sections(table) => self.sections(key, table, found),
        }
    }

    fn free_text(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let DeValue::String(text) = found.get_ref() else {
            self.wrong_type(key, "text", found);
            return None;
        };
        if text.trim().is_empty() {
            self.fault(
                Diagnostic::new(&EMPTY_TEXT, format!("`{}` is empty", key.name))
                    .mend("write it, or remove the key"),
                &found.span(),
            );
            return None;
        }
        Some(Value::Text(text.to_string()))
    }

    fn word(
        &mut self,
        key: &Key,
        words: &[&'static str],
        found: &Spanned<DeValue<'_>>,
    ) -> Option<Value> {
        let Some(Value::Text(text)) = self.free_text(key, found) else {
            return None;
        };
        if words.contains(&text.as_str()) {
            return Some(Value::Text(text));
        }
        let listed = words
            .iter()
            .map(|word| format!("\"{word}\""))
            .collect::<Vec<_>>()
            .join(", ");
        let mend = suggestion(
            &text,
            words.iter().copied(),
            &format!("write one of {listed}"),
        );
        self.fault(
            Diagnostic::new(
                &NOT_A_WORD,
                format!("`{}` is one of {listed}; found \"{text}\"", key.name),
            )
            .mend(mend),
            &found.span(),
        );
        None
    }

    fn symbol(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let Some(Value::Text(text)) = self.free_text(key, found) else {
            return None;
        };
        let is_name = text.chars().all(|c| c.is_ascii_alphanumeric() || c == '_')
            && text.starts_with(|c: char| c.is_ascii_alphabetic());
        if !is_name || text.len() > 40 {
            let mend =
                "a letter, then letters, digits or _, 40 at most; Greek letters by name: rho_w";
            self.fault(
                Diagnostic::new(&BAD_SYMBOL, format!("`{text}` cannot be a symbol")).mend(mend),
                &found.span(),
            );
            return None;
        }
        if is_reserved(&text) {
            self.fault(
                Diagnostic::new(
                    &RESERVED_NAME,
                    format!("`{text}` is a word of the formula language"),
                )
                .mend("choose another symbol"),
                &found.span(),
            );
            return None;
        }
        Some(Value::Text(text))
    }

    fn path(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let Some(Value::Text(text)) = self.free_text(key, found) else {
            return None;
        };
        let is_plain = |part: &str| {
            !part.is_empty()
                && part != "."
                && part != ".."
                && !part.contains(['\\', ':', '*', '?', '"', '<', '>', '|'])
        };
        if text.starts_with('/') || !text.split('/').all(is_plain) || text.len() > 200 {
            let mend =
                "name a file in the folder of the problem file or below it, with / between folders";
            self.fault(
                Diagnostic::new(
                    &BAD_PATH,
                    format!("`{text}` is not a file below the problem's folder"),
                )
                .mend(mend),
                &found.span(),
            );
            return None;
        }
        Some(Value::Text(text))
    }

    fn digest(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let Some(Value::Text(text)) = self.free_text(key, found) else {
            return None;
        };
        let is_digest = text.strip_prefix("sha256:").is_some_and(|hex| {
            hex.len() == 64 && hex.chars().all(|c| matches!(c, '0'..='9' | 'a'..='f'))
        });
        if !is_digest {
            let mend = "write sha256: and the 64 hexadecimal digits of the content fingerprint, in lower case";
            self.fault(
                Diagnostic::new(
                    &BAD_DIGEST,
                    format!("`{}` is a content fingerprint", key.name),
                )
                .mend(mend),
                &found.span(),
            );
            return None;
        }
        Some(Value::Text(text))
    }

    fn date(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let DeValue::Datetime(moment) = found.get_ref() else {
            self.wrong_type(key, "a date without quotes", found);
            return None;
        };
        let date = match (moment.date, moment.time) {
            (Some(date), None) => NaiveDate::from_ymd_opt(
                i32::from(date.year),
                u32::from(date.month),
                u32::from(date.day),
            ),
            _ => None,
        };
        if date.is_none() {
            self.fault(
                Diagnostic::new(
                    &BAD_DATE,
                    format!("`{}` is a calendar date without time", key.name),
                )
                .mend("write it like 2026-11-20"),
                &found.span(),
            );
        }
        date.map(Value::Date)
    }

    fn integer(
        &mut self,
        key: &Key,
        low: i64,
        high: i64,
        found: &Spanned<DeValue<'_>>,
    ) -> Option<Value> {
        let DeValue::Integer(written) = found.get_ref() else {
            self.wrong_type(key, "a whole number", found);
            return None;
        };
        match i64::from_str_radix(written.as_str(), written.radix()) {
            Ok(value) if (low..=high).contains(&value) => Some(Value::Integer(value)),
            _ => {
                let (code, mend) = if key.name == "format" {
                    (&UNKNOWN_FORMAT, "this version reads format = 1")
                } else {
                    (&OUT_OF_RANGE, "write a whole number between them")
                };
                self.fault(
                    Diagnostic::new(
                        code,
                        format!("`{}` lies between {low} and {high}", key.name),
                    )
                    .mend(mend),
                    &found.span(),
                );
                None
            }
        }
    }

    /// A finite number, whole or not.
    fn number(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<f64> {
        let value = match found.get_ref() {
            DeValue::Integer(written) => i64::from_str_radix(written.as_str(), written.radix())
                .ok()
                .map(|value| value as f64),
            DeValue::Float(written) => written.as_str().parse::<f64>().ok(),
            _ => {
                self.wrong_type(key, "a number", found);
                return None;
            }
        };
        match value.filter(|value| value.is_finite()) {
            Some(value) => Some(value),
            None => {
                self.fault(
                    Diagnostic::new(&NOT_FINITE, format!("`{}` takes a finite number", key.name))
                        .mend("write a number like 12.5 or 1e-3"),
                    &found.span(),
                );
                None
            }
        }
    }

    fn number_between(
        &mut self,
        key: &Key,
        low: f64,
        high: f64,
        found: &Spanned<DeValue<'_>>,
    ) -> Option<Value> {
        let value = self.number(key, found)?;
        if (low..=high).contains(&value) {
            return Some(Value::Number(value));
        }
        self.fault(
            Diagnostic::new(
                &OUT_OF_RANGE,
                format!("`{}` lies between {low} and {high}", key.name),
            )
            .mend("write a number between them"),
            &found.span(),
        );
        None
    }

    fn expression(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        match found.get_ref() {
            DeValue::String(_) => self.free_text(key, found),
            DeValue::Integer(_) | DeValue::Float(_) => self.number(key, found).map(Value::Number),
            _ => {
                self.wrong_type(key, "a number, or text like \"12.5 m^2\"", found);
                None
            }
        }
    }

    fn array<'f, 'i>(
        &mut self,
        key: &Key,
        expected: &str,
        found: &'f Spanned<DeValue<'i>>,
    ) -> Option<&'f [Spanned<DeValue<'i>>]> {
        match found.get_ref() {
            DeValue::Array(items) if items.len() <= 100_000 => Some(items),
            DeValue::Array(items) => {
                self.fault(
                    Diagnostic::new(
                        &TOO_MANY,
                        format!(
                            "`{}` has {} entries; the limit is 100000",
                            key.name,
                            items.len()
                        ),
                    )
                    .mend("thin the table, or divide the calculation"),
                    &found.span(),
                );
                None
            }
            _ => {
                self.wrong_type(key, expected, found);
                None
            }
        }
    }

    fn bounds(&mut self, key: &'static Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let items = self.array(key, "two bounds in an array", found)?;
        if items.len() != 2 {
            self.fault(
                Diagnostic::new(
                    &WRONG_TYPE,
                    format!("`{}` takes two bounds, a lower and an upper", key.name),
                )
                .mend("write them like [\"0 m\", \"4.5 m\"]"),
                &found.span(),
            );
            return None;
        }
        let entries: Vec<Option<Entry>> = items
            .iter()
            .map(|item| self.shaped(key, Shape::Expression, item))
            .collect();
        Some(Value::List(
            entries.into_iter().collect::<Option<Vec<Entry>>>()?,
        ))
    }

    fn shaped(
        &mut self,
        key: &'static Key,
        shape: Shape,
        item: &Spanned<DeValue<'_>>,
    ) -> Option<Entry> {
        let value = self.value(key, shape, item)?;
        let text_start = match &value {
            Value::Text(text) => self.text_start(&item.span(), text),
            _ => None,
        };
        Some(Entry {
            value,
            span: item.span(),
            text_start,
        })
    }

    fn texts(&mut self, key: &'static Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let items = self.array(key, "texts in an array", found)?;
        let entries: Vec<Option<Entry>> = items
            .iter()
            .map(|item| self.shaped(key, Shape::Text, item))
            .collect();
        Some(Value::List(
            entries.into_iter().collect::<Option<Vec<Entry>>>()?,
        ))
    }

    fn points(&mut self, key: &Key, found: &Spanned<DeValue<'_>>) -> Option<Value> {
        let items = self.array(key, "pairs of numbers in an array", found)?;
        let mut points = Vec::new();
        for item in items {
            match item.get_ref() {
                DeValue::Array(pair) if pair.len() == 2 => {
                    let (x, y) = (self.number(key, &pair[0]), self.number(key, &pair[1]));
                    points.push((x?, y?));
                }
                _ => {
                    self.fault(
                        Diagnostic::new(&BAD_POINTS, "a point is a pair of numbers")
                            .mend("write [argument, value]"),
                        &item.span(),
                    );
                    return None;
                }
            }
        }
        Some(Value::Points(points))
    }

    fn assignments(
        &mut self,
        key: &'static Key,
        found: &Spanned<DeValue<'_>>,
        mut read: impl FnMut(&mut Self, &Spanned<DeValue<'_>>) -> Option<Value>,
    ) -> Option<Value> {
        let DeValue::Table(inner) = found.get_ref() else {
            self.wrong_type(key, "a table", found);
            return None;
        };
        let mut map = Vec::new();
        for (name, value) in inner {
            if let Some(read) = read(self, value) {
                let text_start = match &read {
                    Value::Text(text) => self.text_start(&value.span(), text),
                    _ => None,
                };
                map.push((
                    name.get_ref().to_string(),
                    Entry {
                        value: read,
                        span: value.span(),
                        text_start,
                    },
                ));
            }
        }
        // In the order of the file.
        map.sort_by_key(|(_, entry)| entry.span.start);
        Some(Value::Map(map))
    }

    fn sections(
        &mut self,
        key: &'static Key,
        table: &'static Table,
        found: &Spanned<DeValue<'_>>,
    ) -> Option<Value> {
        let items = self.array(key, "tables in an array", found)?;
        if items.len() > MAX_ENTRIES {
            self.fault(
                Diagnostic::new(
                    &TOO_MANY,
                    format!(
                        "{} entries of `{}`; the limit is {MAX_ENTRIES}",
                        items.len(),
                        key.name
                    ),
                )
                .mend("divide the calculation"),
                &found.span(),
            );
            return None;
        }
        let mut sections = Vec::new();
        for item in items {
            match item.get_ref() {
                DeValue::Table(inner) => sections.push(self.section(table, inner, item.span())),
                _ => self.wrong_type(key, "tables in an array", item),
            }
        }
        Some(Value::Sections(sections))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn codes(text: &str) -> Vec<&'static str> {
        read("p.toml", text.as_bytes())
            .expect_err(text)
            .iter()
            .map(|fault| fault.code.id)
            .collect()
    }

    #[test]
    fn hand_all_independent_faults_come_at_once() {
        let text = "format = 1\n[calculation]\nnumbr = 1\ndate = \"today\"\nstanding = \"isued\"\n[[input]]\nsymbol = \"2x\"\nmeaning = 3\nsource = \"\"\n[march]\nstep = true\n";
        let found = codes(text);
        for code in ["K01", "K02", "K03", "K04", "K05", "K08"] {
            assert!(found.contains(&code), "{code} in {found:?}");
        }
    }

    #[test]
    fn hand_near_misses_are_suggested() {
        let faults = read("p.toml", b"format = 1\n[calculation]\nnumbr = \"1\"\n").unwrap_err();
        let fault = faults.iter().find(|fault| fault.code.id == "K01").unwrap();
        assert_eq!(fault.mend, "did you mean `number`?");
        assert_eq!(
            (
                fault.place.as_ref().unwrap().start,
                fault.place.as_ref().unwrap().end
            ),
            (25, 30)
        );
    }

    #[test]
    fn hand_encoding_and_syntax() {
        assert_eq!(codes("format = 1\u{202e}\n"), ["T04"]);
        assert_eq!(read("p", &[0xff, 0xfe]).unwrap_err()[0].code.id, "T01");
        assert_eq!(
            read("p", &vec![b' '; MAX_BYTES + 1]).unwrap_err()[0]
                .code
                .id,
            "T02"
        );
        assert!(
            codes("a = = 3\nb = [1,\n")
                .iter()
                .all(|code| *code == "T03")
        );
        assert_eq!(codes(&format!("a = {}", "[".repeat(50_000)))[0], "T03");
    }

    #[test]
    fn hand_text_positions_survive_plain_strings_only() {
        let text = "format = 1\n[[quantity]]\nsymbol=\"q\"\nmeaning=\"m\"\nunit=\"1\"\nformula = 'a + bb'\n";
        let (table, _) = DeTable::parse_recoverable(text);
        let mut faults = Vec::new();
        let section = Reader {
            file: "p",
            text,
            faults: &mut faults,
        }
        .section(&PROBLEM, table.get_ref(), 0..0);
        let entry = section.sections("quantity")[0].entry("formula").unwrap();
        assert_eq!(&text[entry.range_of(&(4..6))], "bb");
    }
}
