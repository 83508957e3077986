//! The words of a calculation: identity, people, history, sources, assumptions, the review log.

use std::ops::Range;

use chrono::NaiveDate;

use super::desk::Desk;
use super::judging::Judging;
use crate::diagnostic::{
    CONTRADICTION, LAST_REVISION, MISSING_KEY, NOT_ISSUABLE, SAME_PERSON, UNKNOWN_ID,
    UNUSED_REFERENCE, suggestion,
};
use crate::problem::model::{
    Assumption, AssumptionStanding, Comment, FileWithText, Head, Person, Reference, Revision,
    Roles, Standing, Verification,
};
use crate::problem::read::Section;

/// Everything that is said in words.
pub struct Words {
    pub head: DatelessHead,
    pub roles: Roles,
    pub verification: Option<Verification>,
    pub revisions: Vec<Revision>,
    pub references: Vec<Reference>,
    pub assumptions: Vec<Assumption>,
    pub sketches: Vec<FileWithText>,
    pub attachments: Vec<FileWithText>,
    pub validations: Vec<(String, String)>,
    pub known_errors: Vec<(String, String)>,
    pub comments: Vec<Comment>,
}

/// The head while its date may still be missing.
pub struct DatelessHead {
    pub date: Option<NaiveDate>,
    pub standing: Standing,
    rest: Head,
}

impl DatelessHead {
    pub fn dated(self, date: NaiveDate) -> Head {
        Head { date, ..self.rest }
    }
}

pub fn words(desk: &mut Desk, section: &Section) -> Words {
    Words {
        head: head(section),
        roles: roles(section),
        verification: section.section("verification").map(|part| Verification {
            method: part.required("method"),
            extent: part.owned("extent"),
        }),
        revisions: section.sections("revision").iter().map(revision).collect(),
        references: section
            .sections("reference")
            .iter()
            .map(reference)
            .collect(),
        assumptions: section
            .sections("assumption")
            .iter()
            .map(|part| assumption(desk, part))
            .collect(),
        sketches: files(section.sections("sketch"), "caption"),
        attachments: files(section.sections("attachment"), "text"),
        validations: pairs(section.sections("validation"), "text", "source"),
        known_errors: pairs(section.sections("known_error"), "text", "bearing"),
        comments: section.sections("comment").iter().map(comment).collect(),
    }
}

fn head(section: &Section) -> DatelessHead {
    let empty = Head {
        number: String::new(),
        title: String::new(),
        project: None,
        client: None,
        issuer: None,
        client_number: None,
        asset: None,
        discipline: None,
        retention: None,
        access: None,
        revision: String::new(),
        date: NaiveDate::default(),
        standing: Standing::Preliminary,
        purpose: String::new(),
        basis: None,
        limits: None,
        conclusion: None,
        caution: None,
        supersedes: None,
        checked: None,
    };
    let Some(part) = section.section("calculation") else {
        return DatelessHead {
            date: None,
            standing: Standing::Preliminary,
            rest: empty,
        };
    };
    let standing = match part.text("standing") {
        Some("issued") => Standing::Issued,
        Some("for check") => Standing::ForCheck,
        _ => Standing::Preliminary,
    };
    let rest = Head {
        number: part.required("number"),
        title: part.required("title"),
        project: part.owned("project"),
        client: part.owned("client"),
        issuer: part.owned("issuer"),
        client_number: part.owned("client_number"),
        asset: part.owned("asset"),
        discipline: part.owned("discipline"),
        retention: part.owned("retention"),
        access: part.owned("access"),
        revision: part.required("revision"),
        standing,
        purpose: part.required("purpose"),
        basis: part.owned("basis"),
        limits: part.owned("limits"),
        conclusion: part.owned("conclusion"),
        caution: part.owned("caution"),
        supersedes: part.owned("supersedes"),
        checked: part.owned("checked"),
        ..empty
    };
    DatelessHead {
        date: part.date("date"),
        standing,
        rest,
    }
}

fn roles(section: &Section) -> Roles {
    let person = |role: &str| {
        let part = section.section("roles")?.section(role)?;
        Some(Person {
            name: part.required("name"),
            capacity: part.owned("capacity"),
            date: part.date("date"),
        })
    };
    Roles {
        originator: person("originator"),
        checker: person("checker"),
        approver: person("approver"),
    }
}

fn revision(part: &Section) -> Revision {
    Revision {
        mark: part.required("mark"),
        date: part.date("date"),
        change: part.required("change"),
        by: part.owned("by"),
    }
}

fn reference(part: &Section) -> Reference {
    Reference {
        id: part.required("id"),
        text: part.required("text"),
        kind: part.owned("kind"),
        edition: part.owned("edition"),
        clause: part.owned("clause"),
    }
}

fn assumption(desk: &mut Desk, part: &Section) -> Assumption {
    let standing = match (part.text("standing"), part.text("tested_by")) {
        (Some(_), Some(_)) => {
            desk.note(
                &CONTRADICTION,
                &part.place_of("tested_by"),
                "an assumption has either `standing` or `tested_by`",
                "remove one of them",
            );
            AssumptionStanding::ToBeConfirmed
        }
        (_, Some(criterion)) => AssumptionStanding::TestedBy(criterion.to_owned()),
        (Some("confirmed"), None) => AssumptionStanding::Confirmed,
        (Some(_), None) => AssumptionStanding::ToBeConfirmed,
        (None, None) => {
            desk.note(
                &MISSING_KEY,
                &part.span,
                "[assumption] lacks `standing`",
                "add a line like: standing = \"confirmed\"",
            );
            AssumptionStanding::ToBeConfirmed
        }
    };
    Assumption {
        id: part.required("id"),
        text: part.required("text"),
        basis: part.required("basis"),
        standing,
        hold: part.owned("hold"),
    }
}

fn comment(part: &Section) -> Comment {
    Comment {
        id: part.required("id"),
        by: part.required("by"),
        on: part.owned("on"),
        text: part.required("text"),
        response: part.owned("response"),
        standing: part.required("standing"),
    }
}

fn files(sections: &[Section], text: &str) -> Vec<FileWithText> {
    sections
        .iter()
        .map(|part| FileWithText {
            file: part.required("file"),
            text: part.required(text),
        })
        .collect()
}

fn pairs(sections: &[Section], first: &str, second: &str) -> Vec<(String, String)> {
    sections
        .iter()
        .map(|part| (part.required(first), part.required(second)))
        .collect()
}

/// What must hold between the parts of the file.
pub fn cross_check(desk: &mut Desk, section: &Section, words: &Words, judging: &Judging) {
    unique_ids(desk, section);
    last_revision(desk, section, words);
    checker_is_another(desk, section, words);
    tested_assumptions(desk, section, judging);
    if words.head.standing == Standing::Issued {
        issuable(desk, section);
    }
    conclusion_names(desk, section, judging);
    unused_references(desk, section, words);
}

/// Every name in braces of the conclusion can be filled in.
fn conclusion_names(desk: &mut Desk, section: &Section, judging: &Judging) {
    let Some(part) = section.section("calculation") else {
        return;
    };
    let Some(entry) = part.entry("conclusion") else {
        return;
    };
    let words = entry.text().unwrap_or_default();
    let mut known: Vec<String> = section
        .sections("result")
        .iter()
        .chain(section.sections("input"))
        .map(|part| part.required("symbol"))
        .collect();
    known.extend(
        section
            .sections("criterion")
            .iter()
            .map(|part| format!("{}.finding", part.required("id"))),
    );
    let mut from = 0;
    while let Some(start) = words[from..].find('{').map(|at| from + at) {
        let Some(end) = words[start..].find('}').map(|at| start + at) else {
            desk.note(
                &UNKNOWN_ID,
                &entry.range_of(&(start..words.len())),
                "this brace is never closed",
                "write {symbol} or {K1.finding}",
            );
            return;
        };
        let name = &words[start + 1..end];
        let (symbol, case) = name.split_once('@').map_or((name, None), |(symbol, case)| {
            (symbol.trim(), Some(case.trim()))
        });
        let span = entry.range_of(&(start..end + 1));
        if !known.iter().any(|other| other == symbol) {
            let mend = suggestion(
                symbol,
                known.iter().map(String::as_str),
                "write {symbol} of a result or input, {symbol @ case}, or {K1.finding}",
            );
            desk.note(
                &UNKNOWN_ID,
                &span,
                format!("nothing called `{symbol}` can be filled in"),
                mend,
            );
        } else if let Some(case) = case
            && !judging.cases.iter().any(|other| other.id == case)
        {
            let mend = suggestion(
                case,
                judging.cases.iter().map(|other| other.id.as_str()),
                "name the id of a [[case]]",
            );
            desk.note(&UNKNOWN_ID, &span, format!("no case `{case}`"), mend);
        }
        from = end + 1;
    }
}

fn unique_ids(desk: &mut Desk, section: &Section) {
    for (key, name) in [
        ("reference", "id"),
        ("assumption", "id"),
        ("criterion", "id"),
        ("comment", "id"),
        ("revision", "mark"),
    ] {
        let mut seen = Vec::new();
        for part in section.sections(key) {
            if let Some(id) = part.text(name) {
                desk.first_use(&mut seen, id, &part.place_of(name), key);
            }
        }
    }
}

fn last_revision(desk: &mut Desk, section: &Section, words: &Words) {
    let Some(part) = section.section("calculation") else {
        return;
    };
    let (Some(last), Some(revision)) = (words.revisions.last(), part.text("revision")) else {
        return;
    };
    if last.mark != revision {
        let message = format!(
            "the revision is \"{revision}\", but the last line of the history is \"{}\"",
            last.mark
        );
        desk.note(
            &LAST_REVISION,
            &part.place_of("revision"),
            message,
            "add the line of this revision to the history, or mend the mark",
        );
    }
}

fn checker_is_another(desk: &mut Desk, section: &Section, words: &Words) {
    let (Some(originator), Some(checker)) = (&words.roles.originator, &words.roles.checker) else {
        return;
    };
    let folded = |name: &str| {
        name.split_whitespace()
            .collect::<Vec<_>>()
            .join(" ")
            .to_lowercase()
    };
    if folded(&originator.name) == folded(&checker.name)
        && let Some(part) = section
            .section("roles")
            .and_then(|roles| roles.section("checker"))
    {
        desk.note(
            &SAME_PERSON,
            &part.place_of("name"),
            format!("{} cannot check their own calculation", checker.name),
            "name another person as checker",
        );
    }
}

fn tested_assumptions(desk: &mut Desk, section: &Section, judging: &Judging) {
    for part in section.sections("assumption") {
        let Some(id) = part.text("tested_by") else {
            continue;
        };
        if !judging.criteria.iter().any(|criterion| criterion.id == id) {
            let mend = suggestion(
                id,
                judging
                    .criteria
                    .iter()
                    .map(|criterion| criterion.id.as_str()),
                "name the id of a [[criterion]]",
            );
            desk.note(
                &UNKNOWN_ID,
                &part.place_of("tested_by"),
                format!("no criterion `{id}`"),
                mend,
            );
        }
    }
}

/// What an issued calculation must have.
fn issuable(desk: &mut Desk, section: &Section) {
    let mut lacks = |span: &Range<usize>, what: &str, mend: &str| {
        desk.note(
            &NOT_ISSUABLE,
            span,
            format!("an issued calculation needs {what}"),
            mend,
        )
    };
    if let Some(part) = section.section("calculation") {
        for (key, mend) in [
            ("basis", "say why this model applies to this problem"),
            (
                "conclusion",
                "say in words what follows; {symbol} is filled in",
            ),
        ] {
            if part.entry(key).is_none() {
                lacks(&part.span, &format!("`{key}`"), mend);
            }
        }
    }
    for key in ["quantity", "state"] {
        for part in section
            .sections(key)
            .iter()
            .filter(|part| part.entry("source").is_none())
        {
            lacks(
                &part.span,
                &format!(
                    "the source of every equation; `{}` has none",
                    part.required("symbol")
                ),
                "add source = \"…\"",
            );
        }
    }
    for part in section.sections("assumption") {
        if part.text("standing") == Some("to be confirmed") && part.entry("hold").is_none() {
            lacks(
                &part.span,
                &format!(
                    "confirmed assumptions; {} is to be confirmed",
                    part.required("id")
                ),
                "confirm it, or add hold = \"what must not proceed until then\"",
            );
        }
    }
    for part in section
        .sections("comment")
        .iter()
        .filter(|part| part.text("standing") == Some("open"))
    {
        lacks(
            &part.place_of("standing"),
            &format!(
                "a review log without open comments; {} is open",
                part.required("id")
            ),
            "answer it",
        );
    }
    if section
        .section("roles")
        .and_then(|roles| roles.section("originator"))
        .is_none()
    {
        let span = section
            .section("calculation")
            .map_or(0..0, |part| part.place_of("standing"));
        lacks(
            &span,
            "an originator",
            "add [roles] originator = { name = \"…\" }",
        );
    }
}

fn unused_references(desk: &mut Desk, section: &Section, words: &Words) {
    let mut cited: Vec<String> = words
        .assumptions
        .iter()
        .map(|assumption| assumption.basis.clone())
        .collect();
    for key in [
        "input",
        "lookup",
        "quantity",
        "state",
        "criterion",
        "case",
        "validation",
    ] {
        for part in section.sections(key) {
            cited.extend(part.owned("source"));
            if key == "state" {
                cited.extend(part.owned("initial_source"));
            }
        }
    }
    if let Some(site) = section.section("site") {
        cited.extend(site.owned("source"));
    }
    for part in section.sections("reference") {
        let Some(id) = part.text("id") else { continue };
        if !cited.iter().any(|text| cites(text, id)) {
            desk.note(
                &UNUSED_REFERENCE,
                &part.place_of("id"),
                format!("reference {id} is cited nowhere"),
                "cite it, or remove it",
            );
        }
    }
}

/// Whether `text` names `id` as a word of its own.
pub fn cites(text: &str, id: &str) -> bool {
    text.match_indices(id).any(|(at, _)| {
        let before = text[..at].chars().next_back();
        let after = text[at + id.len()..].chars().next();
        !before.is_some_and(char::is_alphanumeric) && !after.is_some_and(char::is_alphanumeric)
    })
}
