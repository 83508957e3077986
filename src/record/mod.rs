//! The record: decides every number, its rounding and its words; everything a page says, as data.
//!
//! Owns: parts of the record as named blocks, facts for the template's sentences, data files for machines.
//! Does not own: order and fixed wording (`templates/record.md.jinja`), pages (`render`).
//!
//! Each file here owns one part; `build` below lists them in the order of the record. A new part is one function
//! here and one line in the template.

use std::collections::BTreeMap;

use self::block::{Block, Figure, Identity};
use crate::evidence::CaseEvidence;
use crate::judgement::Verdict;
use crate::problem::model::Model;

pub mod block;
pub mod data;
pub mod terminal;

mod alternate;
mod basis;
mod checks;
mod cover;
mod equations;
mod evidence;
mod figures;
mod inputs;
mod method;
mod plot;
mod readme;
mod results;
mod stability;
mod summary;
mod words;

pub use self::figures::figures;
pub use self::readme::read_me;

/// Name and version of the program, as records print it.
pub const PROGRAM: &str = concat!("countermarch ", env!("CARGO_PKG_VERSION"));

/// A calculation that has been marched and judged.
pub struct Subject<'a> {
    pub model: &'a Model,
    pub cases: &'a [CaseEvidence],
    pub verdict: &'a Verdict,
}

/// What is known of the package by the time the record is written.
pub struct Delivery {
    /// `sha256:` and 64 digits.
    pub fingerprint: String,
    /// Path in the payload, size in bytes and SHA-256 of every payload file but the record itself, in byte order.
    pub files: Vec<(String, usize, String)>,
}

/// The record before a template has given it its order: named blocks and facts.
pub struct Record {
    pub identity: Identity,
    /// Words and flags for the template's sentences.
    pub facts: BTreeMap<&'static str, Fact>,
    /// Groups of blocks by the name under which the template places them.
    pub blocks: BTreeMap<&'static str, Vec<Block>>,
}

/// Sets down everything that the record says.
pub fn build(subject: &Subject, figures: Vec<Figure>, delivery: &Delivery) -> Record {
    let mut blocks = BTreeMap::new();
    cover::add(subject, delivery, &mut blocks);
    summary::add(subject, &mut blocks);
    basis::add(subject, delivery, &mut blocks);
    inputs::add(subject, &mut blocks);
    equations::add(subject, &mut blocks);
    method::add(subject, &mut blocks);
    results::add(subject, &mut blocks);
    evidence::add(subject, &mut blocks);
    for figure in figures {
        let group = figures::group_of(&figure);
        blocks.entry(group).or_default().push(Block::Figure(figure));
    }
    Record {
        identity: cover::identity(subject, delivery),
        facts: facts(subject),
        blocks,
    }
}

/// A word, number or flag that a template may put into its sentences.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Fact {
    Words(String),
    Count(u32),
    Flag(bool),
}

impl From<&str> for Fact {
    fn from(words: &str) -> Fact {
        Fact::Words(words.to_owned())
    }
}

impl From<String> for Fact {
    fn from(words: String) -> Fact {
        Fact::Words(words)
    }
}

impl From<u32> for Fact {
    fn from(count: u32) -> Fact {
        Fact::Count(count)
    }
}

impl From<bool> for Fact {
    fn from(flag: bool) -> Fact {
        Fact::Flag(flag)
    }
}

fn facts(subject: &Subject) -> BTreeMap<&'static str, Fact> {
    let model = subject.model;
    let mut facts: BTreeMap<&'static str, Fact> = BTreeMap::new();
    let mut fact = |name: &'static str, value: Fact| {
        facts.insert(name, value);
    };
    fact("number", model.head.number.clone().into());
    fact("file", model.file.clone().into());
    fact("program", PROGRAM.into());
    fact("variable", model.march.variable.clone().into());
    fact("finding", subject.verdict.overall.word().into());
    fact(
        "has_holds",
        model
            .assumptions
            .iter()
            .any(|assumption| assumption.hold.is_some())
            .into(),
    );
    fact(
        "has_shortfalls",
        (!subject.verdict.shortfalls.is_empty()).into(),
    );
    fact("has_sketch", (!model.sketches.is_empty()).into());
    fact("has_criteria", (!model.criteria.is_empty()).into());
    fact("has_quantities", (!model.quantities.is_empty()).into());
    fact("has_lookups", (!model.lookups.is_empty()).into());
    fact("has_events", (!model.events.is_empty()).into());
    fact("has_switches", (!model.switches.is_empty()).into());
    fact("has_cases", (model.cases.len() > 1).into());
    fact(
        "has_constants",
        (!inputs::constants(model).is_empty()).into(),
    );
    fact("has_validation", (!model.validations.is_empty()).into());
    fact("has_known_errors", (!model.known_errors.is_empty()).into());
    fact("has_comments", (!model.comments.is_empty()).into());
    fact("has_cost", subject.cases[0].cost.is_some().into());
    fact(
        "has_checks",
        (!model.balances.is_empty() || !model.closed_forms.is_empty()).into(),
    );
    fact("has_results", (!model.results.is_empty()).into());
    facts.extend(method::facts(subject));
    facts
}

/// A group of blocks under its name.
type Blocks = BTreeMap<&'static str, Vec<Block>>;
