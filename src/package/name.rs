//! The rule for names: which relative paths a package may hold, on every system alike.
//!
//! Owns: what a name may be, which names clash, how a folder is called, and how a stranger's name is shown
//! without letting it act on a terminal.
//!
//! RFC 8493, section 2.1.3, has CR, LF and `%` encoded in manifests, but `sha256sum -c` and common BagIt
//! validators do not decode `%25`. All three are refused instead, so a manifest's path is always the name.

use std::collections::BTreeMap;
use std::fmt;

use unicode_normalization::UnicodeNormalization;

use super::digest::Digest;

/// Longest relative path in bytes: with a folder before it, it still fits the 260 characters of Windows.
pub const PATH_BYTES: usize = 180;

/// Why a name is refused.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum NameFault {
    Empty,
    Absolute,
    Parent,
    EmptyOrDotPart,
    Backslash,
    DriveLetter,
    PercentSign,
    ReservedCharacter(char),
    ControlCharacter,
    InvisibleCharacter,
    DeviceName,
    EndsInDotOrSpace,
    TooLong,
}

/// Accepts a relative path whose meaning is the same on every system, with `/` between its parts.
pub fn check(path: &str) -> Result<(), NameFault> {
    if path.is_empty() {
        return Err(NameFault::Empty);
    }
    if path.len() > PATH_BYTES {
        return Err(NameFault::TooLong);
    }
    if path.starts_with('/') {
        return Err(NameFault::Absolute);
    }
    if path.as_bytes()[0].is_ascii_alphabetic() && path[1..].starts_with(':') {
        return Err(NameFault::DriveLetter);
    }
    path.chars().try_for_each(check_character)?;
    path.split('/').try_for_each(check_part)
}

/// Pairs of names that some system would take for one file, or that cannot both be unpacked: equal but
/// for case or Unicode normalisation, or a file whose name is also a folder's.
pub fn clashes<'a>(paths: impl IntoIterator<Item = &'a str>) -> Vec<(String, String)> {
    let mut by_key: BTreeMap<String, &str> = BTreeMap::new();
    let mut clashes = Vec::new();
    for path in paths {
        if let Some(first) = by_key.insert(folded(path), path) {
            clashes.push((first.to_owned(), path.to_owned()));
        }
    }
    for (key, path) in &by_key {
        let folders = key.match_indices('/').map(|(end, _)| &key[..end]);
        if let Some(file) = folders.filter_map(|folder| by_key.get(folder)).next() {
            clashes.push(((*file).to_owned(), (*path).to_owned()));
        }
    }
    clashes.extend(folder_clashes(by_key.values().copied()));
    clashes
}

/// A package's folder, and whether number or revision had to be respelled for it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct FolderName {
    pub name: String,
    pub respelled: bool,
}

/// Names the folder: `<number>_<revision>` when issued, otherwise also the standing and the first
/// 8 digits of the content fingerprint.
///
/// Each part keeps letters, digits, `-`, `.` and `_`; any other character becomes `-`, as does a dot at
/// either end, and a part is cut after 40 bytes.
pub fn folder(number: &str, revision: &str, standing: &str, fingerprint: &Digest) -> FolderName {
    let parts = if standing == "issued" {
        vec![number, revision]
    } else {
        vec![number, revision, standing]
    };
    let spelled: Vec<String> = parts.iter().map(|part| spell_part(part)).collect();
    let mut respelled = spelled[0] != number || spelled[1] != revision;
    let mut name = spelled.join("_");
    if standing != "issued" {
        name = format!("{name}_{}", fingerprint.first_8());
    }
    if check(&name).is_err() {
        name.insert(0, '-');
        respelled = true;
    }
    FolderName { name, respelled }
}

/// Shows a stranger's name on one line: nothing in it can move the cursor, hide or turn the text around.
pub fn shown(name: &str) -> String {
    const LONGEST: usize = 120;
    let mut text = String::from("`");
    for character in name.chars().take(LONGEST) {
        if is_hidden(character) || character == '`' {
            text.extend(character.escape_unicode());
        } else {
            text.push(character);
        }
    }
    if name.chars().nth(LONGEST).is_some() {
        text.push('…');
    }
    text.push('`');
    text
}

/// Characters that a reader cannot see or that turn the text around: controls, zero-width, bidirectional.
pub fn is_hidden(character: char) -> bool {
    character.is_control() || is_invisible(character)
}

impl fmt::Display for NameFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let reason = match self {
            NameFault::Empty => "the name is empty",
            NameFault::Absolute => "the name is absolute",
            NameFault::Parent => "the name leaves its folder with `..`",
            NameFault::EmptyOrDotPart => "the name has an empty part or `.` as a part",
            NameFault::Backslash => "the name holds a back-slash",
            NameFault::DriveLetter => "the name begins with a drive letter",
            NameFault::PercentSign => {
                "the name holds `%`, which manifests encode and checking tools misread"
            }
            NameFault::ReservedCharacter(character) => {
                return write!(
                    f,
                    "the name holds `{character}`, which some systems reserve"
                );
            }
            NameFault::ControlCharacter => "the name holds a control character or line break",
            NameFault::InvisibleCharacter => {
                "the name holds an invisible or direction-changing character"
            }
            NameFault::DeviceName => "the name is a device's name on some systems",
            NameFault::EndsInDotOrSpace => {
                "a part of the name begins with a space or ends in a dot or space"
            }
            NameFault::TooLong => return write!(f, "the name is longer than {PATH_BYTES} bytes"),
        };
        f.write_str(reason)
    }
}

fn check_character(character: char) -> Result<(), NameFault> {
    match character {
        '\\' => Err(NameFault::Backslash),
        '%' => Err(NameFault::PercentSign),
        '<' | '>' | ':' | '"' | '|' | '?' | '*' => Err(NameFault::ReservedCharacter(character)),
        _ if character.is_control() => Err(NameFault::ControlCharacter),
        _ if is_invisible(character) => Err(NameFault::InvisibleCharacter),
        _ => Ok(()),
    }
}

fn check_part(part: &str) -> Result<(), NameFault> {
    match part {
        ".." => Err(NameFault::Parent),
        "" | "." => Err(NameFault::EmptyOrDotPart),
        _ if part.ends_with(['.', ' ']) || part.starts_with(' ') => {
            Err(NameFault::EndsInDotOrSpace)
        }
        _ if is_device(part) => Err(NameFault::DeviceName),
        _ => Ok(()),
    }
}

/// Zero-width characters, bidirectional controls, line and paragraph separators, and tag characters.
fn is_invisible(character: char) -> bool {
    matches!(
        character,
        '\u{ad}' | '\u{34f}' | '\u{61c}' | '\u{180e}' | '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}'
            | '\u{2060}'..='\u{206f}' | '\u{feff}' | '\u{fff9}'..='\u{fffb}' | '\u{e0000}'..='\u{e007f}'
    )
}

/// Names that Windows gives to devices, with or without an extension.
fn is_device(part: &str) -> bool {
    let stem = part
        .split('.')
        .next()
        .unwrap_or(part)
        .trim_end()
        .to_uppercase();
    let numbered = |port: &str| {
        stem.strip_prefix(port).is_some_and(|rest| {
            let mut digits = rest.chars();
            let is_port = digits
                .next()
                .is_some_and(|digit| digit.is_ascii_digit() || "¹²³".contains(digit));
            is_port && digits.next().is_none()
        })
    };
    ["CON", "PRN", "AUX", "NUL", "CONIN$", "CONOUT$"].contains(&stem.as_str())
        || numbered("COM")
        || numbered("LPT")
}

/// A key that is equal for names which differ only in case or normalisation.
fn folded(path: &str) -> String {
    path.nfc()
        .flat_map(char::to_uppercase)
        .flat_map(char::to_lowercase)
        .nfc()
        .collect()
}

/// Folders spelled in two ways that some system takes for one: `Inputs/a` beside `inputs/b`.
fn folder_clashes<'a>(paths: impl Iterator<Item = &'a str>) -> Vec<(String, String)> {
    let mut by_key: BTreeMap<String, &str> = BTreeMap::new();
    let mut clashes = Vec::new();
    for path in paths {
        for (end, _) in path.match_indices('/') {
            let folder = &path[..end];
            match by_key.insert(folded(folder), folder) {
                Some(first) if first != folder => {
                    clashes.push((first.to_owned(), folder.to_owned()))
                }
                _ => {}
            }
        }
    }
    clashes.sort();
    clashes.dedup();
    clashes
}

fn spell_part(part: &str) -> String {
    const LONGEST_BYTES: usize = 40;
    let mut spelled = String::new();
    for character in part.nfc() {
        let kept = character.is_alphanumeric() || matches!(character, '-' | '.' | '_');
        let character = if kept { character } else { '-' };
        if spelled.len() + character.len_utf8() > LONGEST_BYTES {
            break;
        }
        spelled.push(character);
    }
    let inner = spelled.trim_start_matches('.');
    let dots_before = spelled.len() - inner.len();
    let trimmed = inner.trim_end_matches('.');
    let dots_after = inner.len() - trimmed.len();
    format!(
        "{}{trimmed}{}",
        "-".repeat(dots_before),
        "-".repeat(dots_after)
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_ordinary_names_are_accepted() {
        for name in [
            "a",
            "data/inputs/tank.toml",
            "Übersicht (2).pdf",
            ".hidden",
            "a..b",
            "console.txt",
            "com10",
        ] {
            assert_eq!(check(name), Ok(()), "{name}");
        }
    }

    /// Device names and reserved characters: Microsoft, "Naming Files, Paths, and Namespaces" (from memory).
    #[test]
    fn hand_each_unsafe_name_has_its_reason() {
        let long = "x".repeat(PATH_BYTES + 1);
        for (name, fault) in [
            ("", NameFault::Empty),
            ("/etc/passwd", NameFault::Absolute),
            ("../a", NameFault::Parent),
            ("a/../../b", NameFault::Parent),
            ("a//b", NameFault::EmptyOrDotPart),
            ("a/", NameFault::EmptyOrDotPart),
            ("./a", NameFault::EmptyOrDotPart),
            ("a\\b", NameFault::Backslash),
            ("C:/a", NameFault::DriveLetter),
            ("c:a", NameFault::DriveLetter),
            ("50 %.csv", NameFault::PercentSign),
            ("%2e%2e/a", NameFault::PercentSign),
            ("file:stream", NameFault::ReservedCharacter(':')),
            ("a\nb", NameFault::ControlCharacter),
            ("a\u{7f}", NameFault::ControlCharacter),
            ("a\u{202e}fdp.exe", NameFault::InvisibleCharacter),
            ("a\u{200b}b", NameFault::InvisibleCharacter),
            ("nul", NameFault::DeviceName),
            ("data/Con.txt", NameFault::DeviceName),
            ("COM1.tar.gz", NameFault::DeviceName),
            ("lpt²", NameFault::DeviceName),
            ("a.", NameFault::EndsInDotOrSpace),
            ("a /b", NameFault::EndsInDotOrSpace),
            (long.as_str(), NameFault::TooLong),
        ] {
            assert_eq!(check(name), Err(fault), "{name:?}");
            assert!(!fault.to_string().contains('\n'));
        }
    }

    #[test]
    fn hand_names_that_a_system_may_confuse_clash() {
        for pair in [
            ["a/B", "a/b"],
            ["é", "e\u{301}"],
            ["a", "a/b"],
            ["Inputs/a", "inputs/b"],
            ["straße", "STRASSE"],
            ["A", "a/b"],
        ] {
            assert_eq!(clashes(pair).len(), 1, "{pair:?}");
        }
        assert_eq!(clashes(["a", "b", "c/a", "c/b", "c/d/a", "ab/c"]), []);
    }

    #[test]
    fn hand_folder_names() {
        let fingerprint = Digest::of(b"abc");
        let case = |number, revision, standing| {
            let FolderName { name, respelled } = folder(number, revision, standing, &fingerprint);
            assert_eq!(check(&name), Ok(()), "{name}");
            (name, respelled)
        };
        assert_eq!(case("PS-101", "B", "issued"), ("PS-101_B".into(), false));
        assert_eq!(
            case("PS-101", "B", "preliminary"),
            ("PS-101_B_preliminary_ba7816bf".into(), false)
        );
        assert_eq!(
            case("PS-101", "B", "for check"),
            ("PS-101_B_for-check_ba7816bf".into(), false)
        );
        assert_eq!(case("../a/b", "1:2", "issued"), ("---a-b_1-2".into(), true));
        assert_eq!(case("con.7", "A", "issued"), ("-con.7_A".into(), true));
        assert_eq!(case("a", "1.0.", "issued"), ("a_1.0-".into(), true));
        assert_eq!(
            case(&"é".repeat(60), "A", "issued"),
            (format!("{}_A", "é".repeat(20)), true)
        );
    }

    #[test]
    fn hand_a_shown_name_stays_on_its_line() {
        assert_eq!(shown("a\n\u{202e}`b"), "`a\\u{a}\\u{202e}\\u{60}b`");
        assert_eq!(shown(&"x".repeat(121)), format!("`{}…`", "x".repeat(120)));
    }
}
