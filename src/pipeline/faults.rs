//! What the stages report, as faults of the problem file with place and mend.

use super::{Failure, Trial};
use crate::calculation::Unsolvable;
use crate::diagnostic::{self, Diagnostic, Place};
use crate::evidence::CaseEvidence;
use crate::float;
use crate::march::{ChoiceError, GridError, StopReason};
use crate::problem::model::Model;
use crate::render::RenderError;

/// Why a case cannot be marched.
pub fn unsolvable(model: &Model, case: usize, error: &Unsolvable) -> Diagnostic {
    let place = Place::new(&model.file, model.march.span.clone());
    let id = &model.cases[case].id;
    match error {
        Unsolvable::NotFinite { what } => Diagnostic::new(
            &diagnostic::NOT_FINITE,
            format!("{what} is not a finite number in case `{id}`"),
        )
        .at(place)
        .mend("mend its formula, or the inputs that it uses"),
        Unsolvable::Grid(error) => Diagnostic::new(
            &diagnostic::BAD_GRID,
            format!(
                "the grid cannot be laid out in case `{id}`: {}",
                grid_words(error)
            ),
        )
        .at(place)
        .mend("mend `from`, `to` or the step"),
        Unsolvable::Choice(error) => Diagnostic::new(
            &diagnostic::BAD_GRID,
            format!(
                "no grid can be chosen in case `{id}`: {}",
                choice_words(model, error)
            ),
        )
        .at(place)
        .mend("give a step, or a larger tolerance"),
    }
}

fn choice_words(model: &Model, error: &ChoiceError) -> String {
    let instant = |at: f64| {
        let value = model.march.unit.from_si(at, model.ambient).unwrap_or(at);
        format!(
            "{} = {}",
            model.march.variable,
            model
                .march
                .unit
                .after(&float::Numeral::significant(value, 6).typographic())
        )
    };
    match error {
        ChoiceError::Tolerance => "the tolerance is not a positive number".to_owned(),
        ChoiceError::Grid(error) => grid_words(error),
        ChoiceError::StepTooShort { at } => {
            format!("no step meets the tolerance at {}", instant(*at))
        }
        ChoiceError::TooManySteps { at, limit } => format!(
            "more than {limit} steps would be needed; {} was reached",
            instant(*at)
        ),
    }
}

fn grid_words(error: &GridError) -> String {
    match error {
        GridError::NotFinite => "a bound or step is not a finite number".to_owned(),
        GridError::EmptySpan => "start and end are the same".to_owned(),
        GridError::StepNotPositive { .. } => "a step is not larger than zero".to_owned(),
        GridError::SegmentOrder { .. } => {
            "the ends of segments do not follow each other in one direction".to_owned()
        }
        GridError::StepLongerThanSpan { .. } => {
            "a step is longer than the span that it divides".to_owned()
        }
        GridError::TooManySteps { steps, limit } => {
            format!("{steps} steps are more than the limit of {limit}")
        }
    }
}

/// Events whose condition is true at the start without a word on what that means.
pub fn true_at_start(model: &Model, cases: &[CaseEvidence]) -> Vec<Diagnostic> {
    let mut found: Vec<(usize, Vec<String>)> = Vec::new();
    for case in cases {
        if let StopReason::TrueAtStart { event } = case.reported().outcome.stop.reason {
            let id = model.cases[case.case].id.clone();
            match found.iter_mut().find(|(other, _)| *other == event) {
                Some((_, ids)) => ids.push(id),
                None => found.push((event, vec![id])),
            }
        }
    }
    found
        .into_iter()
        .map(|(event, ids)| {
            let event = &model.events[event];
            Diagnostic::new(&diagnostic::AT_START, format!("the condition of event `{}` is already true at the start (case {})", event.id, ids.join(", ")))
                .at(Place::new(&model.file, event.span.clone()))
                .mend("add at_start = true (it is an event there) or at_start = false (not until it has been false)")
        })
        .collect()
}

/// What the pages cannot show is a fault of the problem file; the rest is ours.
pub fn render_failure(trial: &Trial, error: RenderError) -> Failure {
    let model = &trial.model;
    let diagnostics: Vec<Diagnostic> = match &error {
        RenderError::MissingGlyphs(characters) => characters
            .iter()
            .map(|character| {
                let at = model.text.find(*character).unwrap_or(0);
                Diagnostic::new(
                    &diagnostic::MISSING_GLYPH,
                    format!(
                        "no bundled face can show {character:?} (U+{:04X})",
                        *character as u32
                    ),
                )
                .at(Place::new(&model.file, at..at + character.len_utf8()))
                .mend("spell it out, or write it in Latin or Greek letters")
            })
            .collect(),
        RenderError::Picture { file, fault } => {
            let name = file.trim_start_matches("attachments/");
            let at = model.text.find(name).unwrap_or(0);
            vec![
                Diagnostic::new(&diagnostic::BAD_PICTURE, format!("`{name}` {fault}"))
                    .at(Place::new(&model.file, at..at + name.len()))
                    .mend("save it as plain SVG, PNG or JPEG"),
            ]
        }
        _ => return Failure::Bug(error.to_string()),
    };
    Failure::Input {
        diagnostics,
        sources: trial.sources.clone(),
    }
}
