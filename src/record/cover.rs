//! The cover: identity, finding, holds, sign-off.

use super::block::{Block, Identity, Inline, Notice, Signatory, Text, Title, Tone};
use super::words::{NONE_STATED, listed, or_none, text};
use super::{Blocks, Delivery, PROGRAM, Subject};
use crate::evidence::Convergence;
use crate::judgement::Overall;
use crate::problem::model::{AssumptionStanding, Person};

pub fn identity(subject: &Subject, delivery: &Delivery) -> Identity {
    let head = &subject.model.head;
    Identity {
        number: head.number.clone(),
        revision: head.revision.clone(),
        title: head.title.clone(),
        project: head.project.clone().unwrap_or_default(),
        issuer: head.issuer.clone().unwrap_or_default(),
        author: subject
            .model
            .roles
            .originator
            .as_ref()
            .map_or_else(|| NONE_STATED.to_owned(), |person| person.name.clone()),
        date: head.date.to_string(),
        standing: head.standing.word().to_owned(),
        fingerprint: delivery.fingerprint.clone(),
        program: PROGRAM.to_owned(),
    }
}

pub fn add(subject: &Subject, delivery: &Delivery, blocks: &mut Blocks) {
    let head = &subject.model.head;
    blocks.insert(
        "title",
        vec![Block::Title(Title {
            kind: "Calculation record".to_owned(),
            number: head.number.clone(),
            title: head.title.clone(),
            project: head.project.clone().unwrap_or_default(),
            issuer: head.issuer.clone().unwrap_or_default(),
            revision: head.revision.clone(),
            date: head.date.to_string(),
            standing: head.standing.word().to_owned(),
        })],
    );
    blocks.insert("cover_facts", vec![Block::Facts(facts(subject))]);
    blocks.insert("finding", vec![Block::Notice(finding(subject))]);
    blocks.insert("holds", holds(subject));
    blocks.insert("sign_off", vec![Block::SignOff(sign_off(subject))]);
    blocks.insert(
        "fingerprint",
        vec![Block::Facts(vec![(
            text("Content fingerprint"),
            vec![Inline::Code(delivery.fingerprint.clone())],
        )])],
    );
}

fn facts(subject: &Subject) -> Vec<(Text, Text)> {
    let head = &subject.model.head;
    let mut rows = Vec::new();
    // Project and issuer stand in the head above, where there are any.
    for (name, value, in_head) in [
        ("Project", &head.project, true),
        ("Client", &head.client, false),
        ("Issuer", &head.issuer, true),
        ("Asset", &head.asset, false),
    ] {
        if value.is_none() || !in_head {
            rows.push((text(name), or_none(value)));
        }
    }
    let optional = [
        ("Client’s number", &head.client_number),
        ("Discipline", &head.discipline),
        ("Retention", &head.retention),
        ("Access", &head.access),
        ("Supersedes", &head.supersedes),
    ];
    for (name, value) in optional {
        if let Some(value) = value {
            let value = if name == "Supersedes" {
                vec![Inline::Code(value.clone())]
            } else {
                text(value.clone())
            };
            rows.push((text(name), value));
        }
    }
    rows
}

/// The overall finding in one sentence, with what weakens it.
pub fn finding(subject: &Subject) -> Notice {
    let verdict = subject.verdict;
    let model = subject.model;
    let number = model.criteria.len();
    let sentence = match verdict.overall {
        Overall::NotSupported => verdict.shortfalls.join(" "),
        _ if number == 0 => "No criterion is stated: the results are given with their numerical uncertainty and are not judged.".to_owned(),
        _ if number == 1 => "The one criterion is met in every case to which it applies, with its numerical uncertainty inside the limit.".to_owned(),
        _ => format!("All {number} criteria are met in every case to which they apply, with their numerical uncertainty inside the limits."),
    };
    let mut body = vec![text(sentence)];
    let weak = weak_results(subject);
    if !weak.is_empty() {
        body.push(text(format!(
            "Convergence short of asymptotic, allowed and named: {}.",
            listed(&weak)
        )));
    }
    if verdict.overall == Overall::SupportedWithHolds {
        body.push(text(
            "Assumptions are still to be confirmed; see the holds.",
        ));
    }
    let tone = match verdict.overall {
        Overall::Supported => Tone::Good,
        Overall::SupportedWithHolds => Tone::Caution,
        Overall::NotSupported => Tone::Bad,
    };
    Notice {
        tone,
        title: format!("Finding: {}", verdict.overall.word()),
        body,
    }
}

/// Judged results whose convergence is weaker than asymptotic, with word and case.
fn weak_results(subject: &Subject) -> Vec<String> {
    let model = subject.model;
    let mut found = Vec::new();
    for judgement in &subject.verdict.judgements {
        let criterion = &model.criteria[judgement.criterion];
        let convergence = subject.cases[judgement.case].results[criterion.result]
            .ladder
            .convergence;
        let is_weak = matches!(
            convergence,
            Convergence::OrderReduced | Convergence::OrderIrregular | Convergence::Oscillatory
        );
        let words = format!(
            "{} in case {} ({})",
            model.results[criterion.result].symbol,
            model.cases[judgement.case].id,
            convergence.word()
        );
        if is_weak && !found.contains(&words) {
            found.push(words);
        }
    }
    found
}

fn holds(subject: &Subject) -> Vec<Block> {
    let body: Vec<Text> = subject
        .model
        .assumptions
        .iter()
        .filter(|assumption| assumption.standing == AssumptionStanding::ToBeConfirmed)
        .map(|assumption| {
            let hold = assumption.hold.as_deref().unwrap_or("no hold stated");
            text(format!(
                "{} (to be confirmed): {} Hold: {hold}",
                assumption.id, assumption.text
            ))
        })
        .collect();
    if body.is_empty() {
        Vec::new()
    } else {
        vec![Block::Notice(Notice {
            tone: Tone::Caution,
            title: "Holds".to_owned(),
            body,
        })]
    }
}

fn sign_off(subject: &Subject) -> Vec<Signatory> {
    let roles = &subject.model.roles;
    let row = |role: &str, person: &Option<Person>, meaning: &str| Signatory {
        role: role.to_owned(),
        name: person
            .as_ref()
            .map_or_else(|| NONE_STATED.to_owned(), |person| person.name.clone()),
        capacity: person
            .as_ref()
            .and_then(|person| person.capacity.clone())
            .unwrap_or_default(),
        date: person
            .as_ref()
            .and_then(|person| person.date)
            .map(|date| date.to_string())
            .unwrap_or_default(),
        meaning: meaning.to_owned(),
    };
    vec![
        row("Originator", &roles.originator, "prepared this calculation"),
        row(
            "Checker",
            &roles.checker,
            "verified it independently of the originator",
        ),
        row(
            "Approver",
            &roles.approver,
            "releases it for the stated purpose",
        ),
    ]
}
