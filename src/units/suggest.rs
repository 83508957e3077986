//! Near misses: what may have been meant by a unit text that is not known.

use super::catalogue::{catalogue, find, prefixes};
use super::unit::Unit;

/// Other programs' and everyday spellings, and what is written here.
pub(super) const SPELLINGS: &[(&str, &[&str])] = &[
    ("rpm", &["rev/min"]),
    ("cfm", &["ft^3/min"]),
    ("scfm", &["ft^3/min"]),
    ("gpm", &["gal(US)/min", "gal(UK)/min"]),
    ("mgd", &["gal(US)/d"]),
    ("lpm", &["L/min"]),
    ("cfs", &["ft^3/s"]),
    ("sec", &["s"]),
    ("secs", &["s"]),
    ("mins", &["min"]),
    ("hr", &["h"]),
    ("hrs", &["h"]),
    ("day", &["d"]),
    ("days", &["d"]),
    ("week", &["wk"]),
    ("l", &["L"]),
    ("ltr", &["L"]),
    ("cc", &["cm^3"]),
    ("ccm", &["cm^3"]),
    ("lbs", &["lb"]),
    ("lbm", &["lb"]),
    ("psig", &["psi(g)"]),
    ("psia", &["psi"]),
    ("barg", &["bar(g)"]),
    ("bara", &["bar"]),
    ("kPag", &["kPa(g)"]),
    ("kPaa", &["kPa"]),
    ("mmWC", &["mmH2O"]),
    ("mmWS", &["mmH2O"]),
    ("mWC", &["mH2O"]),
    ("mph", &["mi/h"]),
    ("kph", &["km/h"]),
    ("kmh", &["km/h"]),
    ("fps", &["ft/s"]),
    ("mps", &["m/s"]),
    ("sqft", &["ft^2"]),
    ("sqm", &["m^2"]),
    ("cbm", &["m^3"]),
    ("inch", &["in"]),
    ("inches", &["in"]),
    ("feet", &["ft"]),
    ("kn", &["knot", "kN"]),
    ("kts", &["knot"]),
    ("knots", &["knot"]),
    ("NM", &["nmi", "N*m"]),
    ("Nm", &["N*m"]),
    ("kNm", &["kN*m"]),
    ("celsius", &["degC"]),
    ("centigrade", &["degC"]),
    ("fahrenheit", &["degF"]),
    ("rankine", &["degR"]),
    ("kelvin", &["K"]),
    ("degK", &["K"]),
    ("degree", &["deg"]),
    ("degrees", &["deg"]),
    ("percent", &["%"]),
    ("micron", &["um"]),
    ("ohms", &["ohm"]),
    ("amu", &["Da"]),
    ("amp", &["A"]),
    ("amps", &["A"]),
    ("kgs", &["kg"]),
    ("tonnes", &["t"]),
];

/// Units that may be meant by an unknown name, best first; at most four.
pub(super) fn nearest(name: &str) -> Vec<String> {
    if let Some((_, meant)) = SPELLINGS.iter().find(|(spelling, _)| *spelling == name) {
        return meant.iter().map(|&unit| unit.to_owned()).collect();
    }
    let letters = name.trim_end_matches(|letter: char| letter.is_ascii_digit());
    if letters.len() < name.len() && find(letters).is_some() {
        return vec![format!("{letters}^{}", &name[letters.len()..])];
    }
    if let Some(symbol) = by_full_name(name) {
        return vec![symbol];
    }
    let same_letters: Vec<String> = symbols_of_length(name.len(), 0)
        .filter(|symbol| symbol.eq_ignore_ascii_case(name))
        .collect();
    if !same_letters.is_empty() {
        return same_letters;
    }
    let allowed = if name.len() <= 4 { 1 } else { 2 };
    let mut by_distance: Vec<(usize, usize, String)> = symbols_of_length(name.len(), allowed)
        .filter(|symbol| symbol.len() > 1)
        .map(|symbol| (strsim::osa_distance(&symbol, name), symbol))
        .filter(|(distance, _)| *distance <= allowed)
        .enumerate()
        .map(|(order, (distance, symbol))| (distance, order, symbol))
        .collect();
    by_distance.sort();
    by_distance
        .into_iter()
        .take(4)
        .map(|(_, _, symbol)| symbol)
        .collect()
}

/// A text with the typographic characters of units, in ASCII; `None` if that is no unit either.
pub(super) fn in_ascii(text: &str) -> Option<String> {
    let mut ascii = String::new();
    let mut in_exponent = false;
    for letter in text.chars() {
        let digit = "⁰¹²³⁴⁵⁶⁷⁸⁹"
            .chars()
            .position(|superscript| superscript == letter);
        let is_exponent = digit.is_some() || letter == '⁻';
        if is_exponent && !in_exponent {
            ascii.push('^');
        }
        in_exponent = is_exponent;
        match (digit, letter) {
            (Some(digit), _) => ascii.push_str(&digit.to_string()),
            (None, '⁻' | '−') => ascii.push('-'),
            (None, 'µ' | 'μ') => ascii.push('u'),
            (None, 'Ω' | '\u{2126}') => ascii.push_str("ohm"),
            (None, '°' | 'º') => ascii.push_str("deg"),
            (None, '℃') => ascii.push_str("degC"),
            (None, '℉') => ascii.push_str("degF"),
            (None, 'Å' | '\u{212B}') => ascii.push_str("angstrom"),
            (None, '·' | '×' | '⋅' | '∙') => ascii.push('*'),
            _ => ascii.push(letter),
        }
    }
    (ascii.is_ascii() && Unit::parse(&ascii).is_ok()).then_some(ascii)
}

/// The symbol of a unit written out, with its prefix: `kilometres`, `Pascal`.
fn by_full_name(name: &str) -> Option<String> {
    let name = name.to_ascii_lowercase();
    let singular = name.strip_suffix('s').unwrap_or(&name);
    let plain = |written: &str| {
        let name = british(written);
        catalogue().find(|entry| entry.name.eq_ignore_ascii_case(name))
    };
    if let Some(entry) = plain(&name).or_else(|| plain(singular)) {
        return Some(entry.symbol.to_owned());
    }
    prefixes().find_map(|prefix| {
        let entry = plain(singular.strip_prefix(prefix.name)?)?;
        entry
            .accepts_prefixes
            .then(|| format!("{}{}", prefix.symbol, entry.symbol))
    })
}

fn british(name: &str) -> &str {
    match name {
        "meter" => "metre",
        "liter" => "litre",
        _ => name,
    }
}

/// Symbols whose length differs from `length` by at most `slack`: plain ones, then prefixed ones.
fn symbols_of_length(length: usize, slack: usize) -> impl Iterator<Item = String> {
    let fits = move |symbol_length: usize| symbol_length.abs_diff(length) <= slack;
    let plain = catalogue()
        .filter(move |entry| fits(entry.symbol.len()))
        .map(|entry| entry.symbol.to_owned());
    let prefixed = catalogue()
        .filter(|entry| entry.accepts_prefixes)
        .flat_map(move |entry| {
            prefixes()
                .filter(move |prefix| fits(prefix.symbol.len() + entry.symbol.len()))
                .map(move |prefix| format!("{}{}", prefix.symbol, entry.symbol))
        });
    plain.chain(prefixed)
}
