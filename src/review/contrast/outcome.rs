//! What the changes did: results with their bands, criteria with their findings.

use std::collections::BTreeSet;

use crate::float;
use crate::review::results::{CriterionFinding, ResultValue, Results};
use crate::review::table::Table;

/// A result of a case, before and after; absent where one calculation lacks case or result.
#[derive(Clone, Debug, PartialEq)]
pub struct ResultChange {
    pub case: String,
    pub symbol: String,
    pub before: Option<ResultValue>,
    pub after: Option<ResultValue>,
}

/// A criterion in a case, before and after.
#[derive(Clone, Debug, PartialEq)]
pub struct CriterionChange {
    pub case: String,
    pub id: String,
    pub before: Option<CriterionFinding>,
    pub after: Option<CriterionFinding>,
}

impl ResultChange {
    /// After less before, where both have a value in the same unit.
    pub fn difference(&self) -> Option<f64> {
        let (before, after) = (self.before.as_ref()?, self.after.as_ref()?);
        if before.unit != after.unit {
            return None;
        }
        Some(after.value? - before.value?)
    }

    /// Whether the bands have no value in common, so that the change is more than numerical.
    pub fn bands_are_apart(&self) -> Option<bool> {
        self.difference()?;
        let [low, high] = self.before.as_ref()?.band?;
        let [new_low, new_high] = self.after.as_ref()?.band?;
        Some(new_low > high || new_high < low)
    }
}

/// Results that differ, in order of the new calculation, and the number of those that do not.
pub fn results(old: &Results, new: &Results) -> (Vec<ResultChange>, usize) {
    let of = |results: &Results| -> Vec<(String, String)> {
        let cases = results.cases.iter();
        let pairs = cases.flat_map(|case| {
            let symbols = case.results.iter();
            symbols.map(|result| (case.id.clone(), result.symbol.clone()))
        });
        pairs.collect()
    };
    let value = |results: &Results, (case, symbol): &(String, String)| {
        results.case(case)?.result(symbol).cloned()
    };
    differing(of(old), of(new), |key| {
        let (before, after) = (value(old, key), value(new, key));
        let is_same = before == after;
        let (case, symbol) = key.clone();
        let change = ResultChange {
            case,
            symbol,
            before,
            after,
        };
        (change, is_same)
    })
}

/// Criteria that differ in finding or margin, and the number of those that do not.
pub fn criteria(old: &Results, new: &Results) -> (Vec<CriterionChange>, usize) {
    let of = |results: &Results| -> Vec<(String, String)> {
        let cases = results.cases.iter();
        let pairs = cases.flat_map(|case| {
            let ids = case.criteria.iter();
            ids.map(|criterion| (case.id.clone(), criterion.id.clone()))
        });
        pairs.collect()
    };
    let finding = |results: &Results, (case, id): &(String, String)| {
        results.case(case)?.criterion(id).cloned()
    };
    differing(of(old), of(new), |key| {
        let (before, after) = (finding(old, key), finding(new, key));
        let is_same = before == after;
        let (case, id) = key.clone();
        let change = CriterionChange {
            case,
            id,
            before,
            after,
        };
        (change, is_same)
    })
}

fn differing<T>(
    old: Vec<(String, String)>,
    new: Vec<(String, String)>,
    change: impl Fn(&(String, String)) -> (T, bool),
) -> (Vec<T>, usize) {
    let mut seen = BTreeSet::new();
    let keys = new.into_iter().chain(old);
    let once: Vec<(String, String)> = keys.filter(|key| seen.insert(key.clone())).collect();
    let (same, differ): (Vec<_>, Vec<_>) = once.iter().map(change).partition(|(_, same)| *same);
    let changes = differ.into_iter().map(|(change, _)| change).collect();
    (changes, same.len())
}

pub fn results_table(changes: &[ResultChange]) -> Table {
    let head = ["case", "result", "before", "after", "difference", "bands"];
    let mut table = Table::new("Results", &head);
    for change in changes {
        let bands = match change.bands_are_apart() {
            Some(true) => "apart",
            Some(false) => "overlap",
            None => "–",
        };
        let unit = change
            .after
            .as_ref()
            .map_or("", |after| after.unit.as_str());
        let difference = change
            .difference()
            .map(|difference| with_unit(&rounded(difference, 3), unit));
        table.rows.push(vec![
            change.case.clone(),
            change.symbol.clone(),
            value_words(&change.before),
            value_words(&change.after),
            difference.unwrap_or_else(|| "–".to_owned()),
            bands.to_owned(),
        ]);
    }
    table
}

pub fn criteria_table(changes: &[CriterionChange]) -> Table {
    let head = [
        "case",
        "criterion",
        "before",
        "after",
        "margin before",
        "margin after",
    ];
    let mut table = Table::new("Criteria", &head);
    for change in changes {
        let finding = |side: &Option<CriterionFinding>| match side {
            Some(side) => side.finding.clone(),
            None => "–".to_owned(),
        };
        let margin = |side: &Option<CriterionFinding>| {
            let side = side.as_ref();
            let margin = side.and_then(|side| side.margin_of_band.or(side.margin).zip(Some(side)));
            margin.map_or("–".to_owned(), |(margin, side)| {
                with_unit(&rounded(margin, 3), &side.unit)
            })
        };
        table.rows.push(vec![
            change.case.clone(),
            change.id.clone(),
            finding(&change.before),
            finding(&change.after),
            margin(&change.before),
            margin(&change.after),
        ]);
    }
    table
}

fn value_words(side: &Option<ResultValue>) -> String {
    let Some(side) = side else {
        return "–".to_owned();
    };
    let Some(value) = side.value else {
        return "no value".to_owned();
    };
    match side.numerical_uncertainty {
        Some(uncertainty) if uncertainty > 0.0 && uncertainty.is_finite() => {
            let (value, uncertainty) = float::value_with_uncertainty(value, uncertainty);
            with_unit(&value.plus_minus(&uncertainty), &side.unit)
        }
        _ => with_unit(&rounded(value, 6), &side.unit),
    }
}

fn rounded(value: f64, digits: usize) -> String {
    float::Numeral::significant(value, digits).typographic()
}

fn with_unit(number: &str, unit: &str) -> String {
    if unit.is_empty() || unit == "1" {
        number.to_owned()
    } else {
        format!("{number} {unit}")
    }
}
