//! Whatever stands in a problem file: no panic, no hang, and either a calculation or a reason.

use std::fs;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

use countermarch::problem::read::read;
use countermarch::problem::resolve::{NamedFiles, named_files, resolve};

use crate::random::Random;

/// Far above what the slowest machine needs for one file.
const BOUND: Duration = Duration::from_secs(5);

/// Pieces that break grammars.
const PIECES: &[&str] = &[
    "\"",
    "'''",
    "\"\"\"",
    "[",
    "]",
    "[[",
    "]]",
    "{",
    "}",
    "=",
    ",",
    ".",
    "\n",
    "\\",
    "\\u0000",
    "#",
    "-",
    "1e999",
    "nan",
    "-inf",
    "0x7f",
    "9223372036854775808",
    "1979-05-27",
    "(((((((((((((((((((((((((((((((((((",
    "^2^3",
    "**",
    "sqrt(",
    "if(",
    "value_at(",
    "final(h)",
    "m^9999999999",
    "kg/",
    " degC",
    "bar(g)",
    "[[state]]",
    "[[event]]\nid = \"a\"\n",
    "symbol = \"h\"",
    "\u{feff}",
    "\u{202e}",
    "水",
    "\0",
    "\r",
    "e-400",
    "1/0",
    "measure(1, \"m\")",
    "number_in(",
    "&&",
    "!",
    "<",
    "set = { h = \"-h\" }",
    "{h.",
    "{}",
];

fn repository(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

/// Reads and resolves; a panic or a long run names what did it.
fn check(bytes: &[u8], what: &str) {
    let start = Instant::now();
    let outcome = catch_unwind(AssertUnwindSafe(|| {
        let Ok((text, section)) = read("problem.toml", bytes) else {
            return;
        };
        let named: NamedFiles = named_files(&section)
            .into_iter()
            .map(|name| (name, Ok(bytes.to_vec())))
            .collect();
        let _ = resolve("problem.toml", &text, &section, &named);
    }));
    assert!(
        outcome.is_ok(),
        "{what} panics on:\n{}",
        String::from_utf8_lossy(bytes)
    );
    assert!(
        start.elapsed() < BOUND,
        "{what} takes {:?} for:\n{}",
        start.elapsed(),
        String::from_utf8_lossy(bytes)
    );
}

fn valid_files() -> Vec<Vec<u8>> {
    let mut paths = vec![
        repository("demo-data/break-tank/break-tank.toml"),
        repository("tests/it/problems/decay.toml"),
    ];
    let samples = fs::read_dir(repository("tests/it/faults")).expect("the samples");
    paths.extend(
        samples
            .map(|entry| entry.expect("an entry").path())
            .filter(|path| path.extension().is_some_and(|end| end == "toml")),
    );
    paths.sort();
    paths
        .iter()
        .map(|path| fs::read(path).expect("a file"))
        .collect()
}

#[test]
fn prop_arbitrary_bytes_never_panic() {
    let mut random = Random::new(1);
    for round in 0..2_000 {
        let length = random.below(400);
        let bytes: Vec<u8> = (0..length).map(|_| random.next() as u8).collect();
        check(&bytes, &format!("round {round} of bytes"));
        let text: String = (0..random.below(60)).map(|_| random.pick(PIECES)).collect();
        check(text.as_bytes(), &format!("round {round} of pieces"));
    }
}

#[test]
fn prop_mutated_files_never_panic() {
    let files = valid_files();
    let mut random = Random::new(2);
    for round in 0..4_000 {
        let mut bytes = files[random.below(files.len())].clone();
        for _ in 0..=random.below(4) {
            mutate(&mut bytes, &mut random);
        }
        check(&bytes, &format!("round {round}"));
    }
}

fn mutate(bytes: &mut Vec<u8>, random: &mut Random) {
    let at = random.below(bytes.len() + 1);
    let to = (at + random.below(40)).min(bytes.len());
    match random.below(6) {
        0 if at < bytes.len() => bytes[at] = random.next() as u8,
        1 => drop(bytes.drain(at..to)),
        2 => {
            let copy = bytes[at..to].to_vec();
            bytes.splice(at..at, copy);
        }
        3 => {
            bytes.splice(at..to, random.pick(PIECES).bytes());
        }
        // A whole line goes, or comes twice.
        4 => {
            let mut lines: Vec<&[u8]> = bytes.split(|byte| *byte == b'\n').collect();
            lines.remove(random.below(lines.len()));
            *bytes = lines.join(&b'\n');
        }
        _ => {
            let mut lines: Vec<&[u8]> = bytes.split(|byte| *byte == b'\n').collect();
            let [one, other, third] = [(); 3].map(|()| random.below(lines.len()));
            lines.swap(one, other);
            lines.push(lines[third]);
            *bytes = lines.join(&b'\n');
        }
    }
}

/// A valid problem with `rate` in place of its own and `extra` at its end.
fn problem_with(rate: &str, extra: &str) -> Vec<u8> {
    let text = fs::read_to_string(repository("tests/it/problems/decay.toml"))
        .expect("the sample")
        .replace("{limit}", "0.1 m");
    format!(
        "{}\n{extra}",
        text.replace("\"-k*h\"", &format!("\"{rate}\""))
    )
    .into_bytes()
}

#[test]
fn hand_depth_and_size_are_bounded() {
    let deep =
        |open: &str, close: &str, n: usize| format!("{}h{}", open.repeat(n), close.repeat(n));
    check(&problem_with(&deep("(", ")", 1_500), ""), "parentheses");
    check(&problem_with(&deep("-", "", 4_000), ""), "signs");
    check(&problem_with(&deep("sqrt(", ")", 600), ""), "calls");
    check(&problem_with(&deep("if(h>0,", ",0)", 400), ""), "branches");
    check(&problem_with(&deep("!", "", 4_000), ""), "negations");
    check(
        &problem_with(&format!("h{}", "+h".repeat(2_000)), ""),
        "a long sum",
    );
    check(
        &problem_with(&format!("h{}", "^h".repeat(2_000)), ""),
        "a long power",
    );
    check(&problem_with(&"h".repeat(100_000), ""), "a long name");
    check(
        &problem_with(
            "h",
            &format!("x = {}{}", "[".repeat(100_000), "]".repeat(100_000)),
        ),
        "nested arrays",
    );
    check(
        &problem_with(
            "h",
            &format!("x = {}{}", "{a=".repeat(100_000), "}".repeat(100_000)),
        ),
        "nested tables",
    );
    check(
        &problem_with("h", &format!("[{}]", vec!["a"; 100_000].join("."))),
        "a dotted key",
    );
}

#[test]
fn hand_ten_thousand_inputs_are_read() {
    let mut extra = String::new();
    for index in 0..9_000 {
        extra.push_str(&format!(
            "[[input]]\nsymbol = \"x_{index}\"\nmeaning = \"m\"\nvalue = 1.0\nsource = \"s\"\n"
        ));
    }
    check(&problem_with("-k*h", &extra), "nine thousand inputs");
    let mut chain = String::new();
    for index in 1..3_000 {
        chain.push_str(&format!("[[quantity]]\nsymbol = \"q_{index}\"\nmeaning = \"m\"\nunit = \"m\"\nformula = \"q_{} + h\"\n", index - 1));
    }
    chain.push_str(
        "[[quantity]]\nsymbol = \"q_0\"\nmeaning = \"m\"\nunit = \"m\"\nformula = \"h\"\n",
    );
    check(
        &problem_with("-k*h", &chain),
        "a chain of three thousand quantities, last first",
    );
}
