//! "May use" points one way only: each room knows the rooms of its row, and nothing else.
//!
//! A failure lists every arrow that no table allows, with file and line. A new arrow is a decision about the
//! architecture: add it to a row here and say why, or do without it.

use std::collections::BTreeMap;
use std::fmt::Write;
use std::fs;
use std::path::{Path, PathBuf};

use self::scan::{Token, paths_after, scan};

mod scan;

/// Each room and what it may use: a room, or one module of it. In reading order: a row names earlier rooms only.
const ROOMS: &[(&str, &[&str])] = &[
    ("float", &[]),
    ("diagnostic", &[]),
    ("units", &["float"]),
    ("formula", &["float", "diagnostic", "units"]),
    ("march", &["float"]),
    (
        "problem",
        &["float", "diagnostic", "units", "formula", "march"],
    ),
    (
        "calculation",
        &["float", "units", "formula", "march", "problem"],
    ),
    (
        "evidence",
        &[
            "float",
            "units",
            "formula",
            "march",
            "problem",
            "calculation",
        ],
    ),
    ("judgement", &["float", "problem", "evidence"]),
    (
        "record",
        &[
            "float",
            "diagnostic",
            "units",
            "formula",
            "march",
            "problem",
            "calculation",
            "evidence",
            "judgement",
        ],
    ),
    ("render", &["float", "formula::typeset", "record"]),
    ("package", &[]),
    ("world", &["package"]),
    (
        "review",
        &[
            "float",
            "diagnostic",
            "units",
            "formula",
            "march",
            "problem",
            "calculation",
            "evidence",
            "package",
        ],
    ),
    (
        "pipeline",
        &[
            "float",
            "diagnostic",
            "units",
            "formula",
            "march",
            "problem",
            "calculation",
            "evidence",
            "judgement",
            "record",
            "render",
            "package",
            "world",
            "review",
        ],
    ),
    (
        "cli",
        &[
            "diagnostic",
            "judgement",
            "record",
            "world",
            "review",
            "pipeline",
        ],
    ),
];

/// What a single file may use beyond the row of its room, and why.
const FILES: &[(&str, &[&str])] = &[
    // `countermarch units`, `methods`, `functions`, `limits`, `keys`: printed from the registries themselves.
    (
        "cli/reference.rs",
        &[
            "units",
            "formula::parse",
            "formula::tree",
            "march",
            "problem",
            "calculation",
            "package",
        ],
    ),
];

/// Crates that only one place may name, so that they can be replaced there.
const DOORS: &[(&str, &[&str])] = &[
    ("evalexpr", &["formula/parse.rs"]),
    ("pxfm", &["float/"]),
    ("libm", &["float/"]),
    // The solver of the alternate integration.
    ("diffsol", &["evidence/"]),
    ("nalgebra", &["evidence/"]),
    ("printpdf", &["render/pdf/"]),
    // Problem files, and the page style that is a part of the program.
    ("toml", &["problem/read.rs", "render/"]),
    ("clap", &["cli/"]),
    ("minijinja", &["render/compose.rs"]),
    // `render` may not use `package`; a page file names its fonts and itself by digest.
    ("sha2", &["package/digest.rs", "render/pdf/"]),
    ("plotters", &["render/figure/"]),
];

/// What of the standard library reaches outside the calculation, or differs from run to run, and who may.
const OUTSIDE: &[(&str, &[&str])] = &[
    ("fs", &["world/"]),
    ("env", &["world/", "main.rs"]),
    ("time", &["world/"]),
    ("net", &[]),
    // Several packages in one call, in order.
    ("thread", &["world/"]),
    // The exit status is handed to the operating system in these two.
    ("process", &["world/", "main.rs", "cli/mod.rs"]),
];

/// Names whose mere presence breaks determinism.
const NEVER: &[&str] = &["HashMap", "HashSet", "RandomState", "unsafe"];

/// Functions of f64 whose bits change with the CPU: `float` is their only door.
const TRANSCENDENTAL: &[&str] = &[
    "sin", "cos", "tan", "sin_cos", "asin", "acos", "atan", "atan2", "sinh", "cosh", "tanh",
    "asinh", "acosh", "atanh", "exp", "exp2", "exp_m1", "ln", "ln_1p", "log", "log2", "log10",
    "powf", "powi", "cbrt", "hypot", "mul_add",
];

/// A source file outside test code.
struct Source {
    /// Below `src/`, with slashes.
    path: String,
    /// `a::b` for `a/b.rs` and `a/b/mod.rs`; empty for the crate's root.
    module: Vec<String>,
    tokens: Vec<Token>,
}

impl Source {
    fn at(&self, line: usize) -> String {
        format!("src/{}:{line}", self.path)
    }

    fn is_in(&self, places: &[&str]) -> bool {
        places.iter().any(|place| {
            self.path == *place || place.ends_with('/') && self.path.starts_with(place)
        })
    }
}

#[test]
fn prop_rooms_use_only_the_rooms_of_their_row() {
    check(|source| {
        let Some(room) = source.module.first() else {
            return Vec::new();
        };
        let Some((_, allowed)) = ROOMS.iter().find(|(name, _)| name == room) else {
            return vec![(1, format!("room `{room}` is not in the table"))];
        };
        let own = FILES
            .iter()
            .filter(|(file, _)| *file == source.path)
            .flat_map(|(_, arrows)| *arrows);
        let is_allowed = |path: &str| {
            allowed
                .iter()
                .chain(own.clone())
                .any(|arrow| path == *arrow || path.starts_with(&format!("{arrow}::")))
        };
        paths_within_crate(source)
            .into_iter()
            .filter(|(path, _)| path[0] != *room && !is_allowed(&path.join("::")))
            .map(|(path, line)| (line, format!("`{room}` uses `{}`", path.join("::"))))
            .collect()
    });
}

#[test]
fn prop_crates_are_named_behind_their_door_only() {
    check(|source| {
        let closed = |name: &str| {
            DOORS
                .iter()
                .any(|(door, places)| *door == name && !source.is_in(places))
        };
        let tokens = &source.tokens;
        (0..tokens.len())
            .filter(|at| closed(&tokens[*at].text) && is_path_root(tokens, *at))
            .map(|at| {
                (
                    tokens[at].line,
                    format!("names the crate `{}`", tokens[at].text),
                )
            })
            .collect()
    });
}

#[test]
fn prop_only_world_reaches_outside() {
    check(|source| {
        let roots = (0..source.tokens.len())
            .filter(|at| source.tokens[*at].text == "std" && is_path_root(&source.tokens, *at));
        let mut found: Vec<(usize, String)> = roots
            .flat_map(|at| paths_after(&source.tokens, at))
            .filter(|(path, _)| {
                OUTSIDE.iter().any(|(name, places)| {
                    path.first().is_some_and(|first| first == name) && !source.is_in(places)
                })
            })
            .map(|(path, line)| (line, format!("uses `std::{}`", path.join("::"))))
            .collect();
        let never = source
            .tokens
            .iter()
            .filter(|token| NEVER.contains(&token.text.as_str()));
        found.extend(never.map(|token| (token.line, format!("names `{}`", token.text))));
        found
    });
}

#[test]
fn prop_float_is_the_only_door_to_transcendental_functions() {
    check(|source| {
        if source.is_in(&["float/"]) {
            return Vec::new();
        }
        source
            .tokens
            .windows(3)
            .filter(|window| {
                let [before, name, after] = window else {
                    return false;
                };
                TRANSCENDENTAL.contains(&name.text.as_str())
                    && after.text == "("
                    && before.text == "."
                    || matches!(before.text.as_str(), "f64" | "f32")
                        && name.text == "::"
                        && TRANSCENDENTAL.contains(&after.text.as_str())
            })
            .map(|window| {
                (
                    window[1].line,
                    format!("calls `{}{}`", window[0].text, window[1].text),
                )
            })
            .collect()
    });
}

#[test]
fn prop_table_is_in_order_and_complete() {
    let source = fs::read_to_string(root().join("lib.rs")).expect("src/lib.rs");
    let tokens = scan(&source).tokens;
    let declared: Vec<&str> = tokens
        .windows(3)
        .filter(|window| window[0].text == "mod" && window[2].text == ";")
        .map(|window| window[1].text.as_str())
        .collect();
    let expected: Vec<&str> = ROOMS.iter().map(|(room, _)| *room).collect();
    let mut sorted = declared.clone();
    sorted.sort_unstable();
    let mut rooms = expected.clone();
    rooms.sort_unstable();
    assert_eq!(
        sorted, rooms,
        "src/lib.rs and the table name the same rooms"
    );
    for (index, (room, allowed)) in ROOMS.iter().enumerate() {
        for arrow in *allowed {
            let target = arrow.split("::").next().unwrap_or_default();
            assert!(
                ROOMS[..index].iter().any(|(earlier, _)| *earlier == target),
                "`{room}` may use `{arrow}`, which comes later or not at all"
            );
        }
    }
    // The crate's map promises that each module uses only those above it.
    let place = |room: &str| declared.iter().position(|name| *name == room);
    for (room, allowed) in ROOMS {
        for arrow in *allowed {
            let target = arrow.split("::").next().unwrap_or_default();
            if let (Some(here), Some(there)) = (place(room), place(target)) {
                assert!(
                    there < here,
                    "src/lib.rs lists `{room}` above `{target}`, which it may use"
                );
            }
        }
    }
}

/// Applies a rule to every source file and fails with all that it finds.
fn check(rule: impl Fn(&Source) -> Vec<(usize, String)>) {
    let sources = sources();
    assert!(sources.len() > 50, "src/ was not found");
    let mut broken = String::new();
    for source in &sources {
        for (line, what) in rule(source) {
            let _ = writeln!(broken, "{}: {what}", source.at(line));
        }
    }
    assert!(broken.is_empty(), "\n{broken}");
}

/// Paths that lead to another room or stay within this one, from the crate's root on.
fn paths_within_crate(source: &Source) -> Vec<(Vec<String>, usize)> {
    let tokens = &source.tokens;
    let mut found = Vec::new();
    for at in 0..tokens.len() {
        let is_followed = tokens.get(at + 1).is_some_and(|next| next.text == "::");
        if !is_followed || !is_path_root(tokens, at) {
            continue;
        }
        match tokens[at].text.as_str() {
            "crate" | "countermarch" => found.extend(paths_after(tokens, at)),
            "super" => found.extend(paths_after(tokens, at).into_iter().filter_map(
                |(path, line)| {
                    let climbed = 1 + path
                        .iter()
                        .take_while(|segment| *segment == "super")
                        .count();
                    let mut absolute = source
                        .module
                        .get(..source.module.len().checked_sub(climbed)?)?
                        .to_vec();
                    absolute.extend(path.into_iter().skip_while(|segment| segment == "super"));
                    Some((absolute, line))
                },
            )),
            _ => {}
        }
    }
    found.retain(|(path, _)| !path.is_empty());
    found
}

fn is_path_root(tokens: &[Token], at: usize) -> bool {
    let before = at.checked_sub(1).map(|before| tokens[before].text.as_str());
    let after = tokens.get(at + 1).map(|token| token.text.as_str());
    before != Some("::") && (after == Some("::") || before == Some("use"))
}

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("src")
}

/// Every file below `src/` that is compiled into the program.
fn sources() -> Vec<Source> {
    let mut texts = BTreeMap::new();
    collect(&root(), "", &mut texts);
    let scanned: BTreeMap<&String, scan::Scanned> = texts
        .iter()
        .map(|(path, text)| (path, scan(text)))
        .collect();
    let test_only: Vec<Vec<String>> = scanned
        .iter()
        .flat_map(|(path, scanned)| {
            scanned
                .test_modules
                .iter()
                .map(move |name| [module_of(path), vec![name.clone()]].concat())
        })
        .collect();
    scanned
        .into_iter()
        .map(|(path, scanned)| Source {
            path: path.clone(),
            module: module_of(path),
            tokens: scanned.tokens,
        })
        .filter(|source| {
            !test_only
                .iter()
                .any(|module| source.module.starts_with(module))
        })
        .collect()
}

fn collect(folder: &Path, below: &str, texts: &mut BTreeMap<String, String>) {
    for entry in fs::read_dir(folder).expect("a folder below src/") {
        let entry = entry.expect("an entry below src/");
        let name = format!("{below}{}", entry.file_name().to_string_lossy());
        if entry.path().is_dir() {
            collect(&entry.path(), &format!("{name}/"), texts);
        } else if name.ends_with(".rs") {
            texts.insert(
                name,
                fs::read_to_string(entry.path()).expect("a source file"),
            );
        }
    }
}

fn module_of(path: &str) -> Vec<String> {
    let path = path.trim_end_matches(".rs").trim_end_matches("/mod");
    if matches!(path, "lib" | "main") {
        Vec::new()
    } else {
        path.split('/').map(str::to_owned).collect()
    }
}
