//! Sections to a [`Model`]: names, units, dimensions, cross-checks. Parse, don't validate: what comes out is valid.
//!
//! Reading order: this file, then `desk` (notes faults, reads quantities and formulas), `scope` (what names stand
//! for), `head` (words), `physics` (the equations), `judging` (results, criteria, cases), `checks` (balances, closed
//! forms).

use std::collections::{BTreeMap, BTreeSet};

use self::desk::Desk;
pub use self::physics::{MAX_POINTS, MAX_STATES};
use super::model::Model;
use super::read::Section;
use crate::diagnostic::{Diagnostic, any_fault};

mod checks;
mod desk;
mod head;
mod judging;
mod physics;
mod scope;

/// A file that the problem names: its bytes, or why they cannot be had.
pub type NamedFiles = BTreeMap<String, Result<Vec<u8>, String>>;

/// Files that the problem names, in byte order.
pub fn named_files(section: &Section) -> BTreeSet<String> {
    ["lookup", "sketch", "attachment"]
        .into_iter()
        .flat_map(|key| section.sections(key))
        .filter_map(|part| part.owned("file"))
        .collect()
}

/// Gives the sections of a problem file their meaning.
///
/// Returns the calculation with warnings.
///
/// # Errors
/// Every independent fault, with places.
pub fn resolve(
    file: &str,
    text: &str,
    section: &Section,
    files: &NamedFiles,
) -> Result<(Model, Vec<Diagnostic>), Vec<Diagnostic>> {
    let mut desk = Desk::new(file);
    refuse_what_is_not_computed(&mut desk, section);
    let words = head::words(&mut desk, section);
    let physics = physics::physics(&mut desk, section, files, words.head.standing);
    let judging = judging::judging(&mut desk, section, &physics);
    let checks = checks::checks(&mut desk, section, &physics, &judging);
    head::cross_check(&mut desk, section, &words, &judging);
    physics::warn_of_unused(&mut desk, section, &physics, &judging, &checks);
    for name in ["sketch", "attachment"] {
        desk.check_files(section.sections(name), files);
    }
    let diagnostics = desk.finish();
    if any_fault(&diagnostics) {
        // What a faulty part does not use or judge is no news: warnings would mostly be echoes.
        return Err(diagnostics
            .into_iter()
            .filter(|diagnostic| !diagnostic.code.is_warning())
            .collect());
    }
    let (Some(march), Some(date)) = (physics.march, words.head.date) else {
        return Err(diagnostics);
    };
    let model = Model {
        file: file.to_owned(),
        text: text.to_owned(),
        files: files
            .iter()
            .filter_map(|(name, bytes)| Some((name.clone(), bytes.as_ref().ok()?.clone())))
            .collect(),
        head: words.head.dated(date),
        roles: words.roles,
        verification: words.verification,
        revisions: words.revisions,
        references: words.references,
        assumptions: words.assumptions,
        ambient: physics.ambient,
        inputs: physics.inputs,
        lookups: physics.lookups,
        quantities: physics.quantities,
        states: physics.states,
        switches: physics.switches,
        events: physics.events,
        march,
        results: judging.results,
        criteria: judging.criteria,
        balances: checks.balances,
        closed_forms: checks.closed_forms,
        cases: judging.cases,
        sketches: words.sketches,
        attachments: words.attachments,
        validations: words.validations,
        known_errors: words.known_errors,
        comments: words.comments,
        figures: judging.figures,
    };
    Ok((model, diagnostics))
}

/// Keys of the format that this version does not compute are refused, never ignored.
fn refuse_what_is_not_computed(desk: &mut Desk, section: &Section) {
    for key in ["uncertainty", "correlation"] {
        if section.entry(key).is_some() {
            desk.not_yet(&section.place_of(key), &format!("[{key}]"));
        }
    }
    for input in section.sections("input") {
        for key in ["spread", "from"] {
            if input.entry(key).is_some() {
                desk.not_yet(&input.place_of(key), &format!("`{key}` of an input"));
            }
        }
    }
    if let Some(march) = section.section("march") {
        for key in ["target"] {
            if march.entry(key).is_some() {
                desk.not_yet(&march.place_of(key), &format!("`{key}`"));
            }
        }
    }
    if let Some(calculation) = section.section("calculation")
        && calculation.entry("checked").is_some()
    {
        desk.not_yet(&calculation.place_of("checked"), "`checked`");
    }
    if let Some(record) = section.section("record")
        && record.entry("templates").is_some()
    {
        desk.not_yet(&record.place_of("templates"), "`templates`");
    }
}
