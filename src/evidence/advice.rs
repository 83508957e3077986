//! Advice in a sentence where the evidence falls short: which step or method would do, and what it would cost.

use super::CaseEvidence;
use crate::float::{self, Numeral};
use crate::problem::model::Model;

/// Why the march of a case is unstable and what would do; none if it is not.
pub fn unstable(model: &Model, case: &CaseEvidence) -> Option<String> {
    let stability = &case.stability;
    let run = stability
        .run
        .filter(|run| run.growth > super::stability::MOST_GROWTH)?;
    let id = &model.cases[case.case].id;
    let instant = |t: f64| instant(model, t);
    let growth = if run.growth > 1e6 {
        "more than a million times".to_owned()
    } else {
        format!(
            "{} times",
            Numeral::significant(run.growth, 2).typographic()
        )
    };
    let mut words = format!(
        "The march of case “{id}” is unstable with {}: from {} to {} a mode that should decay grows {growth}.",
        case.method.title,
        instant(run.from),
        instant(run.to)
    );
    if let Some(limit) = stability.largest_stable_step {
        let shorter = (case.longest_step / limit.value).ceil();
        words.push_str(&format!(
            " A step of at most {} would be stable",
            step(model, limit.value)
        ));
        words.push_str(&if shorter > 1.0 {
            format!(
                ", at about {} times the cost",
                Numeral::shortest(shorter).typographic()
            )
        } else {
            String::new()
        });
        words.push_str(if case.method.is_implicit() {
            "."
        } else {
            "; so would an implicit method such as tr-bdf2 or radau5 at any step."
        });
    }
    Some(words)
}

/// What would help where differences between levels do not shrink.
pub const NOT_CONVERGED: &str =
    "a shorter step, more levels or a method for stiff equations may bring it to converge";

/// Which step would bring the band of a result inside a limit that its value meets or misses by `margin`, and its cost.
pub fn resolving(model: &Model, case: &CaseEvidence, result: usize, margin: f64) -> String {
    let ladder = &case.results[result].ladder;
    let Some(uncertainty) = ladder.uncertainty.filter(|_| margin != 0.0) else {
        return "the value lies on the limit".to_owned();
    };
    let order = ladder
        .observed_order
        .unwrap_or(1.0)
        .clamp(0.5, f64::from(case.method.order));
    let shorter = float::pow(uncertainty / margin.abs(), 1.0 / order);
    // More than this is no advice.
    if shorter > 1e6 {
        return "no practicable step would settle it".to_owned();
    }
    let parts = shorter.ceil().max(2.0);
    let share = Numeral::shortest(parts).typographic();
    format!(
        "by the order observed, a step of about {} would settle it, at {share} times the cost",
        step(model, case.longest_step / parts)
    )
}

/// "t = 120 s".
pub fn instant(model: &Model, t: f64) -> String {
    let unit = &model.march.unit;
    let value = unit.from_si(t, model.ambient).unwrap_or(f64::NAN);
    let digits = if value == 0.0 {
        "0".to_owned()
    } else {
        Numeral::significant(value, 4).typographic()
    };
    format!("{} = {}", model.march.variable, unit.after(&digits))
}

/// A step, rounded down to two digits so that what is printed holds.
pub fn step(model: &Model, step_si: f64) -> String {
    let unit = model.march.unit.difference_unit();
    let value = unit.difference_from_si(step_si);
    let near = Numeral::significant(value, 2);
    let is_above = near
        .plain()
        .parse::<f64>()
        .is_ok_and(|rounded| rounded > value);
    // One unit of the second digit lower: 2.0 % to 10 % of the value.
    let numeral = if is_above {
        Numeral::significant(value - 0.5 * second_place(value), 2)
    } else {
        near
    };
    unit.after(&numeral.typographic())
}

/// One unit of the second significant digit.
fn second_place(value: f64) -> f64 {
    let magnitude = float::log10(value.abs()).floor() - 1.0;
    float::pow(10.0, magnitude)
}
