//! Diagnostics: what is wrong with an input, where, and how to mend it. Collected, never thrown one by one.
//!
//! Owns: codes, places, the terminal text of a diagnostic. Does not own: the checks that raise them.

use std::collections::BTreeMap;
use std::fmt;
use std::ops::Range;

/// A kind of fault, with a stable identifier that a user can look up.
#[derive(Debug, PartialEq, Eq)]
pub struct Code {
    /// Letter for the stage (T text, K keys, U units, F formulas, X cross-checks, R other files, N numbers, W warnings) and two digits.
    pub id: &'static str,
    /// What the fault is, in a few words.
    pub title: &'static str,
}

impl Code {
    /// Warnings do not stop a calculation.
    pub fn is_warning(&self) -> bool {
        self.id.starts_with('W')
    }
}

/// Declares the codes and the table of all of them in one place.
macro_rules! codes {
    ($($name:ident $id:literal $title:literal;)*) => {
        $(pub static $name: Code = Code { id: $id, title: $title };)*
        /// Every code, in the order of the table.
        pub static CODES: &[&Code] = &[$(&$name),*];
    };
}

codes! {
    NOT_TEXT "T01" "the file is not UTF-8 text";
    TOO_LARGE "T02" "the file is larger than a problem file may be";
    NOT_TOML "T03" "the file is not valid TOML";
    INVISIBLE "T04" "invisible or bidirectional control character";
    TOO_DEEP "T05" "nested deeper than a problem file may be";
    UNKNOWN_KEY "K01" "unknown key";
    MISSING_KEY "K02" "a required key is missing";
    WRONG_TYPE "K03" "a value of another type is expected";
    NOT_A_WORD "K04" "not one of the words that this key takes";
    BAD_SYMBOL "K05" "not a usable symbol";
    BAD_DATE "K06" "not a calendar date";
    OUT_OF_RANGE "K07" "a number outside the range that this key takes";
    EMPTY_TEXT "K08" "text is expected here";
    UNKNOWN_FORMAT "K09" "unknown version of the file format";
    BAD_PATH "K10" "not a usable file name";
    TOO_MANY "K11" "more entries than the stated limit";
    BAD_DIGEST "K12" "not a SHA-256 digest";
    BAD_QUANTITY "U01" "not a quantity";
    UNKNOWN_UNIT "U02" "unknown unit";
    AMBIGUOUS_UNIT "U03" "ambiguous unit";
    WRONG_UNIT "U04" "a unit of another dimension";
    NO_AMBIENT "U05" "gauge pressure without ambient pressure";
    ABSOLUTE_DIFFERENCE "U06" "a difference given in an absolute unit";
    BAD_CHARACTER "F01" "a character that no formula contains";
    BAD_NUMBER "F02" "not a usable number";
    SYNTAX "F03" "the formula cannot be read";
    POWER_CHAIN "F04" "a power of a power without parentheses";
    UNKNOWN_SYMBOL "F05" "unknown symbol";
    UNKNOWN_FUNCTION "F06" "unknown function";
    WRONG_ARITY "F07" "wrong number of arguments";
    DIMENSION "F08" "the dimensions do not fit";
    NOT_A_CONDITION "F09" "a condition is expected";
    NOT_A_NUMBER "F10" "a quantity is expected, not a condition";
    BAD_EXPONENT "F11" "not a usable exponent";
    PROBE_MISPLACED "F12" "a result function outside a result";
    CYCLE "F13" "quantities defined through each other";
    FORMULA_TOO_LONG "F14" "the formula is longer or deeper than the stated limit";
    RESERVED_NAME "F15" "a reserved name";
    NOT_AN_INPUT "F16" "only inputs may stand here";
    BAD_ARGUMENT "F17" "not a usable argument of this function";
    DUPLICATE "X01" "defined twice";
    UNKNOWN_ID "X02" "refers to something that is not defined";
    LAST_REVISION "X03" "the last revision mark differs from the revision";
    SAME_PERSON "X04" "the checker is the originator";
    NOT_ISSUABLE "X05" "an issued calculation lacks something it must have";
    CONTRADICTION "X06" "keys that exclude each other";
    OUTSIDE_PLAUSIBLE "X07" "a value outside its stated range";
    AT_START "X08" "a condition that is already true at the start";
    NOT_YET "X09" "not available in this version";
    BAD_GRID "X10" "the grid cannot be laid out";
    NO_STATE "X11" "nothing to march";
    UNREADABLE "R01" "a named file cannot be read";
    BAD_CSV "R02" "a table file that cannot be used";
    BAD_POINTS "R03" "points of a lookup that cannot be used";
    BAD_PICTURE "R04" "a picture that cannot be used";
    MISSING_GLYPH "R05" "characters that no bundled face can show";
    NOT_FINITE "N01" "a value that is not finite";
    UNJUDGED_CASE "W01" "a case in no criterion";
    UNUSED_INPUT "W02" "an input that nothing uses";
    UNUSED_REFERENCE "W03" "a reference that nothing cites";
}

/// A byte range in a named file.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Place {
    pub file: String,
    pub start: usize,
    pub end: usize,
}

impl Place {
    pub fn new(file: &str, span: Range<usize>) -> Place {
        Place {
            file: file.to_owned(),
            start: span.start,
            end: span.end,
        }
    }
}

/// One fault or warning.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    pub code: &'static Code,
    /// What was found and what was expected.
    pub message: String,
    pub place: Option<Place>,
    /// How to mend it; empty when the message says it all.
    pub mend: String,
}

impl Diagnostic {
    pub fn new(code: &'static Code, message: impl Into<String>) -> Diagnostic {
        Diagnostic {
            code,
            message: message.into(),
            place: None,
            mend: String::new(),
        }
    }

    #[must_use]
    pub fn at(mut self, place: Place) -> Diagnostic {
        self.place = Some(place);
        self
    }

    #[must_use]
    pub fn mend(mut self, mend: impl Into<String>) -> Diagnostic {
        self.mend = mend.into();
        self
    }
}

/// True when at least one of `diagnostics` is more than a warning.
pub fn any_fault(diagnostics: &[Diagnostic]) -> bool {
    diagnostics
        .iter()
        .any(|diagnostic| !diagnostic.code.is_warning())
}

/// The text of several diagnostics for a terminal, in order of file and place, with excerpts from `sources`.
pub struct Listing<'a> {
    pub diagnostics: &'a [Diagnostic],
    /// Text of each file by name; a file that is not here is quoted without excerpt.
    pub sources: &'a BTreeMap<String, String>,
}

/// Most diagnostics that are listed: nobody reads more, and each costs a walk through its file.
const LISTED: usize = 200;

impl fmt::Display for Listing<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut ordered: Vec<&Diagnostic> = self.diagnostics.iter().collect();
        ordered.sort_by(|a, b| (&a.place, a.code.id).cmp(&(&b.place, b.code.id)));
        for diagnostic in ordered.iter().take(LISTED) {
            write_one(f, diagnostic, self.sources)?;
        }
        match ordered.len().checked_sub(LISTED + 1) {
            Some(rest) => writeln!(f, "and {} more", rest + 1),
            None => Ok(()),
        }
    }
}

fn write_one(
    f: &mut fmt::Formatter<'_>,
    diagnostic: &Diagnostic,
    sources: &BTreeMap<String, String>,
) -> fmt::Result {
    let kind = if diagnostic.code.is_warning() {
        "warning"
    } else {
        "fault"
    };
    write!(f, "{kind} {}", diagnostic.code.id)?;
    if let Some(place) = &diagnostic.place {
        write!(f, " in {}", place.file)?;
        if let Some(source) = sources.get(&place.file) {
            let (line, column) = line_and_column(source, place.start);
            write!(f, ", line {line}, column {column}")?;
        }
    }
    writeln!(f, ": {}", diagnostic.message)?;
    if let Some(place) = &diagnostic.place
        && let Some(source) = sources.get(&place.file)
    {
        write_excerpt(f, source, place)?;
    }
    if !diagnostic.mend.is_empty() {
        writeln!(f, "    mend: {}", diagnostic.mend)?;
    }
    Ok(())
}

/// One-based line and column (in characters) of byte `offset`.
pub fn line_and_column(source: &str, offset: usize) -> (usize, usize) {
    let before = source.get(..offset).unwrap_or(source);
    let line = before.matches('\n').count() + 1;
    let column = before.chars().rev().take_while(|c| *c != '\n').count() + 1;
    (line, column)
}

/// Longest stretch of a line that is quoted, in characters.
const EXCERPT_WIDTH: usize = 110;

fn write_excerpt(f: &mut fmt::Formatter<'_>, source: &str, place: &Place) -> fmt::Result {
    let start = place.start.min(source.len());
    let line_start = source[..start].rfind('\n').map_or(0, |i| i + 1);
    let line_end = source[start..]
        .find('\n')
        .map_or(source.len(), |i| start + i);
    let (line, column) = line_and_column(source, start);
    let text: Vec<char> = source[line_start..line_end].trim_end().chars().collect();
    let marked = source
        .get(start..place.end.min(line_end))
        .map_or(1, |s| s.chars().count().max(1));
    // A long line is cut to the stretch around the fault.
    let first = (column - 1)
        .saturating_sub(EXCERPT_WIDTH / 2)
        .min(text.len().saturating_sub(EXCERPT_WIDTH));
    let last = text.len().min(first + EXCERPT_WIDTH);
    let quoted: String = text[first..last]
        .iter()
        .map(|c| if c.is_control() { ' ' } else { *c })
        .collect();
    let margin = format!("{line:>5}  ");
    let carets = "^".repeat(marked.min(last.saturating_sub(column - 1).max(1)));
    writeln!(f, "{margin}{quoted}")?;
    writeln!(
        f,
        "{}{carets}",
        " ".repeat(margin.len() + (column - 1).saturating_sub(first))
    )
}

/// The candidate nearest to `word` in spelling, if one is near enough to be what was meant.
pub fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    candidates
        .into_iter()
        .map(|candidate| (strsim::damerau_levenshtein(word, candidate), candidate))
        .filter(|(distance, candidate)| *distance <= 1 + word.len().min(candidate.len()) / 4)
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

/// "did you mean `x`?" for the nearest of `candidates`, or the text `otherwise`.
pub fn suggestion<'a>(
    word: &str,
    candidates: impl IntoIterator<Item = &'a str>,
    otherwise: &str,
) -> String {
    nearest(word, candidates).map_or_else(
        || otherwise.to_owned(),
        |near| format!("did you mean `{near}`?"),
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_excerpt_points_at_the_fault() {
        let source = "a = 1\nformula = \"q_ou - 1\"\n".to_owned();
        let place = Place::new("p.toml", 17..21);
        let fault = Diagnostic::new(&UNKNOWN_SYMBOL, "unknown symbol `q_ou`")
            .at(place)
            .mend("did you mean `q_out`?");
        let text = Listing {
            diagnostics: &[fault],
            sources: &BTreeMap::from([("p.toml".to_owned(), source)]),
        }
        .to_string();
        let expected = "fault F05 in p.toml, line 2, column 12: unknown symbol `q_ou`\n    2  formula = \"q_ou - 1\"\n                  ^^^^\n    mend: did you mean `q_out`?\n";
        assert_eq!(text, expected);
    }

    #[test]
    fn hand_codes_are_unique_and_ordered_within_their_letter() {
        for pair in CODES.windows(2) {
            if pair[0].id[..1] == pair[1].id[..1] {
                assert!(pair[0].id < pair[1].id, "{} {}", pair[0].id, pair[1].id);
            }
        }
    }

    #[test]
    fn hand_nearest_word() {
        assert_eq!(nearest("formla", ["formula", "format"]), Some("formula"));
        assert_eq!(nearest("zzz", ["formula", "format"]), None);
    }
}
