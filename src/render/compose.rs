//! From a record and a template to a document: order, headings, numbers, cross-references.
//!
//! Owns: the template's language and numbering. The template is minijinja that yields Markdown; `block("name")`
//! places a group of blocks, `ref("anchor")` a cross-reference, `symbol("name")` a symbol, `step("t")` the
//! symbol of a step. Text that comes from
//! the problem file arrives in blocks and is never read as Markdown. Does not own: any sentence or number.

use std::collections::BTreeMap;

use minijinja::syntax::SyntaxConfig;
use minijinja::{AutoEscape, Environment, Output, State, UndefinedBehavior, Value};
use pulldown_cmark::{Event, HeadingLevel, Options, Parser, Tag, TagEnd};

use crate::formula::typeset::{self, Math};
use crate::record::block::{Block, Document, Heading, Inline, Text};
use crate::record::{Fact, Record};

/// The template that is bundled.
pub const TEMPLATE: &str = include_str!("../../templates/record.md.jinja");

/// Marks that enclose what the template's functions place; they cannot come from a problem file's text.
const OPEN: char = '\u{e000}';
const CLOSE: char = '\u{e001}';

/// Why a template cannot be used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum TemplateError {
    /// minijinja's message, with the line where it has one.
    Template {
        message: String,
        line: Option<usize>,
    },
    UnknownBlock(String),
    UnknownReference(String),
    /// Markdown that a record has no use for, by its name.
    Unsupported(String),
}

impl std::fmt::Display for TemplateError {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            TemplateError::Template {
                message,
                line: Some(line),
            } => write!(f, "template, line {line}: {message}"),
            TemplateError::Template {
                message,
                line: None,
            } => write!(f, "template: {message}"),
            TemplateError::UnknownBlock(name) => write!(f, "template: no block is called `{name}`"),
            TemplateError::UnknownReference(anchor) => {
                write!(f, "template: nothing has the anchor `{anchor}`")
            }
            TemplateError::Unsupported(what) => {
                write!(f, "template: {what} cannot stand in a record")
            }
        }
    }
}

impl std::error::Error for TemplateError {}

/// Orders the record's blocks by `template` and numbers them.
///
/// # Errors
/// A template that cannot be rendered, or that places what does not exist.
pub fn compose(record: Record, template: &str) -> Result<Document, TemplateError> {
    let markdown = expand(&record, template)?;
    let mut composer = Composer {
        groups: record.blocks,
        blocks: Vec::new(),
        fault: None,
    };
    composer.read(&markdown);
    if let Some(fault) = composer.fault {
        return Err(fault);
    }
    let mut blocks = composer.blocks;
    let labels = number(&mut blocks);
    resolve(&mut blocks, &labels)?;
    Ok(Document {
        identity: record.identity,
        blocks,
    })
}

fn expand(record: &Record, template: &str) -> Result<String, TemplateError> {
    let fault = |error: minijinja::Error| TemplateError::Template {
        message: error.to_string(),
        line: error.line(),
    };
    let mut environment = Environment::new();
    environment.set_undefined_behavior(UndefinedBehavior::Strict);
    environment.set_fuel(Some(1_000_000));
    environment.set_auto_escape_callback(|_| AutoEscape::Custom("markdown".into()));
    environment.set_formatter(escape_markdown);
    let syntax = SyntaxConfig::builder()
        .comment_delimiters("<#", "#>")
        .trim_blocks(true)
        .lstrip_blocks(true)
        .build();
    environment.set_syntax(syntax.map_err(fault)?);
    let mark = |kind: &'static str| {
        move |name: String| Value::from_safe_string(format!("{OPEN}{kind}:{name}{CLOSE}"))
    };
    environment.add_function("block", mark("block"));
    environment.add_function("ref", mark("ref"));
    environment.add_function("symbol", mark("symbol"));
    environment.add_function("step", mark("step"));
    environment.add_function("contents", || {
        Value::from_safe_string(format!("{OPEN}contents:{CLOSE}"))
    });
    environment.add_function("page_break", || {
        Value::from_safe_string(format!("{OPEN}page:{CLOSE}"))
    });
    let facts = record.facts.iter().map(|(name, fact)| {
        let value = match fact {
            Fact::Words(words) => Value::from(words.as_str()),
            Fact::Count(count) => Value::from(*count),
            Fact::Flag(flag) => Value::from(*flag),
        };
        ((*name).to_owned(), value)
    });
    environment
        .add_template("record", template)
        .map_err(fault)?;
    environment
        .get_template("record")
        .and_then(|template| template.render(Value::from_pairs(facts)))
        .map_err(fault)
}

/// Facts are plain text: their punctuation must not become markup.
fn escape_markdown(out: &mut Output, _: &mut State, value: &Value) -> Result<(), minijinja::Error> {
    let text = value.to_string();
    if value.is_safe() {
        return Ok(out.write_str(&text)?);
    }
    for character in text.chars() {
        if character.is_ascii_punctuation() {
            out.write_str("\\")?;
        }
        if character == '\n' {
            out.write_str(" ")?;
        } else if character != OPEN && character != CLOSE {
            out.write_str(character.encode_utf8(&mut [0; 4]))?;
        }
    }
    Ok(())
}

/// Reads the expanded template into blocks.
struct Composer {
    groups: BTreeMap<&'static str, Vec<Block>>,
    blocks: Vec<Block>,
    fault: Option<TemplateError>,
}

/// How a heading counts.
struct HeadingStyle {
    level: u8,
    anchor: String,
    numbered: bool,
    appendix: bool,
}

impl Composer {
    fn read(&mut self, markdown: &str) {
        let mut words: Text = Vec::new();
        let mut emphasis = 0usize;
        let mut strong = 0usize;
        let mut heading: Option<HeadingStyle> = None;
        let mut list: Option<(bool, Vec<Text>)> = None;
        for event in Parser::new_ext(markdown, Options::ENABLE_HEADING_ATTRIBUTES) {
            match event {
                Event::Text(text) => self.add_text(&text, emphasis, strong, &mut words),
                Event::Code(text) => words.push(Inline::Code(text.to_string())),
                Event::SoftBreak => words.push(Inline::Text(" ".to_owned())),
                Event::HardBreak => words.push(Inline::Break),
                Event::Start(Tag::Emphasis) => emphasis += 1,
                Event::End(TagEnd::Emphasis) => emphasis -= 1,
                Event::Start(Tag::Strong) => strong += 1,
                Event::End(TagEnd::Strong) => strong -= 1,
                Event::Start(Tag::Paragraph) => {}
                Event::End(TagEnd::Paragraph) => {
                    let text = std::mem::take(&mut words);
                    match &mut list {
                        // A paragraph inside a list is the item itself, which ends it.
                        Some(_) => words = text,
                        None => self.place(text),
                    }
                }
                Event::Start(Tag::Heading {
                    level, id, classes, ..
                }) => {
                    let has = |name: &str| classes.iter().any(|class| class.as_ref() == name);
                    heading = Some(HeadingStyle {
                        level: level_of(level),
                        anchor: id.map(|id| id.to_string()).unwrap_or_default(),
                        numbered: !has("unnumbered"),
                        appendix: has("appendix"),
                    });
                }
                Event::End(TagEnd::Heading(_)) => {
                    if let Some(style) = heading.take() {
                        let text: String = words.drain(..).map(|piece| plain(&piece)).collect();
                        let number = match (style.numbered, style.appendix) {
                            (false, _) => "",
                            (true, true) => "appendix",
                            (true, false) => "number",
                        };
                        self.blocks.push(Block::Heading(Heading {
                            level: style.level,
                            number: number.to_owned(),
                            text,
                            anchor: style.anchor,
                        }));
                    }
                }
                Event::Start(Tag::List(first)) => list = Some((first.is_some(), Vec::new())),
                Event::Start(Tag::Item) => words.clear(),
                Event::End(TagEnd::Item) => {
                    if let Some((_, items)) = &mut list {
                        items.push(std::mem::take(&mut words));
                    }
                }
                Event::End(TagEnd::List(_)) => {
                    if let Some((ordered, items)) = list.take() {
                        self.blocks.push(Block::List { ordered, items });
                    }
                }
                other => self.refuse(&other),
            }
        }
    }

    fn refuse(&mut self, event: &Event) {
        let what = match event {
            Event::Html(_) | Event::InlineHtml(_) => "HTML",
            Event::Start(Tag::Image { .. }) => "a Markdown image (figures are blocks)",
            Event::Start(Tag::Link { .. }) => "a Markdown link (use ref)",
            Event::Start(Tag::CodeBlock(_)) => "a code block (listings are blocks)",
            Event::Start(Tag::BlockQuote(_)) => "a block quotation (notices are blocks)",
            Event::Rule => "a horizontal rule",
            _ => return,
        };
        self.fault
            .get_or_insert(TemplateError::Unsupported(what.to_owned()));
    }

    /// Text with marks taken apart.
    fn add_text(&mut self, text: &str, emphasis: usize, strong: usize, words: &mut Text) {
        let mut rest = text;
        while let Some(start) = rest.find(OPEN) {
            let Some(length) = rest[start..].find(CLOSE) else {
                break;
            };
            push_words(&rest[..start], emphasis, strong, words);
            let mark = &rest[start + OPEN.len_utf8()..start + length];
            if let Some((kind, name)) = mark.split_once(':') {
                words.push(match kind {
                    "symbol" => Inline::Math(typeset::symbol(name)),
                    "step" => Inline::Math(Math::step_of(name)),
                    "ref" => Inline::Reference {
                        text: String::new(),
                        anchor: name.to_owned(),
                    },
                    // Blocks are placed when their paragraph ends.
                    _ => Inline::Text(format!("{OPEN}{mark}{CLOSE}")),
                });
            }
            rest = &rest[start + length + CLOSE.len_utf8()..];
        }
        push_words(rest, emphasis, strong, words);
    }

    /// Ends a paragraph: words become one, marks of blocks are replaced by the blocks.
    fn place(&mut self, text: Text) {
        let mut words: Text = Vec::new();
        for piece in text {
            let mark = match &piece {
                Inline::Text(text) => text
                    .strip_prefix(OPEN)
                    .and_then(|text| text.strip_suffix(CLOSE))
                    .map(str::to_owned),
                _ => None,
            };
            match mark {
                None => words.push(piece),
                Some(mark) => {
                    self.paragraph(&mut words);
                    self.place_mark(&mark);
                }
            }
        }
        self.paragraph(&mut words);
    }

    fn paragraph(&mut self, words: &mut Text) {
        let is_empty = words
            .iter()
            .all(|piece| matches!(piece, Inline::Text(text) if text.trim().is_empty()));
        if is_empty {
            words.clear();
        } else {
            self.blocks.push(Block::Paragraph(std::mem::take(words)));
        }
    }

    fn place_mark(&mut self, mark: &str) {
        match mark.split_once(':') {
            Some(("contents", _)) => self.blocks.push(Block::Contents),
            Some(("page", _)) => self.blocks.push(Block::PageBreak),
            Some((_, name)) => match self.groups.get(name) {
                Some(group) => self.blocks.extend(group.iter().cloned()),
                // Groups of things that a problem does not have are empty.
                None if OPTIONAL.contains(&name) => {}
                None => {
                    self.fault
                        .get_or_insert(TemplateError::UnknownBlock(name.to_owned()));
                }
            },
            None => {}
        }
    }
}

/// Groups that exist only if the problem has something for them.
const OPTIONAL: &[&str] = &[
    "sketches",
    "lookup_figures",
    "history_figures",
    "error_figure",
];

fn push_words(text: &str, emphasis: usize, strong: usize, words: &mut Text) {
    if text.is_empty() {
        return;
    }
    words.push(if strong > 0 {
        Inline::Strong(text.to_owned())
    } else if emphasis > 0 {
        Inline::Emphasis(text.to_owned())
    } else {
        Inline::Text(text.to_owned())
    });
}

fn plain(piece: &Inline) -> String {
    match piece {
        Inline::Text(text) | Inline::Emphasis(text) | Inline::Strong(text) | Inline::Code(text) => {
            text.clone()
        }
        Inline::Reference { text, .. } => text.clone(),
        Inline::Math(_) => String::new(),
        Inline::Break => " ".to_owned(),
    }
}

fn level_of(level: HeadingLevel) -> u8 {
    match level {
        HeadingLevel::H1 => 1,
        HeadingLevel::H2 => 2,
        _ => 3,
    }
}

/// Numbers headings, tables, figures and equations; returns what a reference to each anchor says.
fn number(blocks: &mut [Block]) -> BTreeMap<String, String> {
    let mut labels = BTreeMap::new();
    let mut counters = [0u32; 3];
    let mut in_appendix = false;
    let (mut tables, mut figures, mut equations) = (0, 0, 0);
    let mut anonymous = 0;
    for block in blocks {
        match block {
            Block::Heading(heading) => {
                if !heading.number.is_empty() {
                    if heading.number == "appendix" && !in_appendix {
                        in_appendix = true;
                        counters = [0; 3];
                    }
                    let level = usize::from(heading.level - 1);
                    counters[level] += 1;
                    counters[level + 1..].fill(0);
                    heading.number = heading_number(&counters[..=level], in_appendix);
                }
                if heading.anchor.is_empty() {
                    anonymous += 1;
                    heading.anchor = format!("part-{anonymous}");
                }
                let word = if in_appendix { "appendix" } else { "section" };
                labels.insert(heading.anchor.clone(), format!("{word} {}", heading.number));
            }
            Block::Table(table) => {
                tables += 1;
                table.label = format!("Table {tables}");
                labels.insert(table.anchor.clone(), table.label.clone());
            }
            Block::Figure(figure) => {
                figures += 1;
                figure.label = format!("Figure {figures}");
                labels.insert(figure.anchor.clone(), figure.label.clone());
            }
            Block::Equation(equation) if !equation.label.is_empty() => {
                equations += 1;
                equation.label = format!("({equations})");
                labels.insert(
                    equation.anchor.clone(),
                    format!("equation {}", equation.label),
                );
            }
            _ => {}
        }
    }
    labels
}

fn heading_number(counters: &[u32], in_appendix: bool) -> String {
    let mut parts: Vec<String> = counters.iter().map(u32::to_string).collect();
    if in_appendix {
        let letter = char::from(b'A' + ((counters[0].max(1) - 1) % 26) as u8);
        parts[0] = letter.to_string();
    }
    parts.join(".")
}

fn resolve(blocks: &mut [Block], labels: &BTreeMap<String, String>) -> Result<(), TemplateError> {
    for block in blocks {
        let texts: Vec<&mut Text> = match block {
            Block::Paragraph(text) => vec![text],
            Block::List { items, .. } => items.iter_mut().collect(),
            _ => continue,
        };
        for piece in texts.into_iter().flatten() {
            if let Inline::Reference { text, anchor } = piece {
                *text = labels
                    .get(anchor.as_str())
                    .cloned()
                    .ok_or_else(|| TemplateError::UnknownReference(anchor.clone()))?;
            }
        }
    }
    Ok(())
}
