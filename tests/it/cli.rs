//! The program as its users run it: exit statuses, messages, what is written and what is not.
//!
//! Every run is hermetic: an empty environment, a HOME and a folder of its own.

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use countermarch::diagnostic::CODES;
use tempfile::TempDir;

/// Codes that no sample file can show, and where they are tested instead.
const WITHOUT_SAMPLE: &[(&str, &str)] = &[
    ("T01", "the file is not text: hand_files_that_are_no_text"),
    (
        "T02",
        "the file is larger than a repository should hold: hand_files_that_are_no_text",
    ),
    (
        "T05",
        "nothing raises it: the reader of TOML stops before, with a T03, as too_deep.toml shows",
    ),
    ("K11", "as T02: hand_files_that_are_no_text"),
];

/// A folder to run in, gone after the test.
pub struct Desk {
    folder: TempDir,
}

impl Desk {
    pub fn new() -> Desk {
        let folder = tempfile::tempdir().expect("a temporary folder");
        fs::create_dir(folder.path().join("home")).expect("a home");
        fs::create_dir(folder.path().join("out")).expect("a folder for packages");
        Desk { folder }
    }

    pub fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    /// Runs the program here with nothing in its environment but a home and `environment`.
    pub fn run_in(&self, arguments: &[&str], environment: &[(&str, &str)]) -> Output {
        Command::new(env!("CARGO_BIN_EXE_countermarch"))
            .args(arguments)
            .current_dir(self.folder.path())
            .env_clear()
            .env("HOME", self.path("home"))
            .envs(environment.iter().copied())
            .output()
            .expect("the program runs")
    }

    pub fn run(&self, arguments: &[&str]) -> Output {
        self.run_in(arguments, &[])
    }

    /// Every file and folder below `name`, relative to it.
    fn below(&self, name: &str) -> BTreeSet<PathBuf> {
        let mut found = BTreeSet::new();
        let mut waiting = vec![self.path(name)];
        while let Some(folder) = waiting.pop() {
            for entry in fs::read_dir(&folder).expect("a folder") {
                let path = entry.expect("an entry").path();
                if path.is_dir() {
                    waiting.push(path.clone());
                }
                found.insert(path);
            }
        }
        found
    }
}

pub fn status(output: &Output) -> i32 {
    output.status.code().expect("no signal")
}

pub fn standard_error(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

fn tests_folder(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("tests/it")
        .join(name)
}

/// What a sample file says of itself: `# expect F05 at 12:14`, one line a diagnostic.
fn expectations(text: &str) -> BTreeSet<String> {
    text.lines()
        .filter_map(|line| line.strip_prefix("# expect "))
        .map(str::to_owned)
        .collect()
}

/// Diagnostics of a terminal text, in the same form, and those that do not say how to mend the fault.
fn diagnostics(file: &str, text: &str) -> (BTreeSet<String>, BTreeSet<String>) {
    let mut found = BTreeMap::new();
    let mut last = String::new();
    for line in text.lines() {
        let after_kind = line
            .strip_prefix("fault ")
            .or_else(|| line.strip_prefix("warning "));
        if let Some((code, rest)) = after_kind.and_then(|rest| rest.split_once(' ')) {
            let place = rest
                .strip_prefix(&format!("in {file}, line "))
                .and_then(|rest| {
                    let (line, rest) = rest.split_once(", column ")?;
                    Some(format!("{line}:{}", rest.split_once(": ")?.0))
                });
            last = format!(
                "{code} at {}",
                place.unwrap_or_else(|| format!("no place: {rest}"))
            );
            found.insert(last.clone(), false);
        } else if line.trim_start().starts_with("mend: ") {
            found.insert(last.clone(), true);
        }
    }
    let unmended = found
        .iter()
        .filter(|(_, mended)| !**mended)
        .map(|(found, _)| found.clone())
        .collect();
    (found.into_keys().collect(), unmended)
}

/// Issues a sample file: its diagnostics are those of its first lines, and a fault leaves nothing behind.
fn check(path: &Path) -> Result<(), String> {
    let name = path
        .file_name()
        .and_then(|name| name.to_str())
        .expect("a name");
    let text = fs::read_to_string(path).expect("a sample file");
    let expected = expectations(&text);
    if expected.is_empty() {
        return Err("the first line says `# expect CODE at LINE:COLUMN`".to_owned());
    }
    let desk = Desk::new();
    let output = desk.run(&["issue", path.to_str().expect("a path"), "--into", "out"]);
    let said = standard_error(&output);
    let (found, unmended) = diagnostics(name, &said);
    if found != expected {
        return Err(format!("expected {expected:?}, found {found:?}\n{said}"));
    }
    if !unmended.is_empty() {
        return Err(format!("nothing says how to mend {unmended:?}\n{said}"));
    }
    let are_warnings = expected.iter().all(|code| code.starts_with('W'));
    let (expected_status, is_written) = if are_warnings { (0, true) } else { (2, false) };
    if status(&output) != expected_status || desk.below("out").is_empty() == is_written {
        return Err(format!(
            "exit status {}, written: {:?}\n{said}",
            status(&output),
            desk.below("out")
        ));
    }
    if !desk.below("home").is_empty() {
        return Err(format!(
            "written to the home folder: {:?}",
            desk.below("home")
        ));
    }
    Ok(())
}

fn samples() -> Vec<PathBuf> {
    let entries = fs::read_dir(tests_folder("faults")).expect("the folder of samples");
    let mut paths: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|end| end == "toml"))
        .collect();
    paths.sort();
    paths
}

#[test]
fn hand_sample_files_trigger_their_diagnostics() {
    let misses: Vec<String> = samples()
        .iter()
        .filter_map(|path| {
            check(path)
                .err()
                .map(|miss| format!("{}: {miss}", path.file_name().unwrap_or_default().display()))
        })
        .collect();
    assert!(misses.is_empty(), "\n{}", misses.join("\n"));
}

#[test]
fn prop_every_code_has_a_sample() {
    let texts: Vec<String> = samples()
        .iter()
        .map(|path| fs::read_to_string(path).expect("a sample"))
        .collect();
    let shown: BTreeSet<String> = texts
        .iter()
        .flat_map(|text| expectations(text))
        .filter_map(|line| Some(line.split_once(' ')?.0.to_owned()))
        .collect();
    for code in CODES {
        let is_excepted = WITHOUT_SAMPLE.iter().any(|(id, _)| *id == code.id);
        assert_ne!(
            shown.contains(code.id),
            is_excepted,
            "{} ({}): one sample in tests/it/faults, or an exception with a reason",
            code.id,
            code.title
        );
    }
    for code in &shown {
        assert!(
            CODES.iter().any(|known| known.id == code),
            "no such code: {code}"
        );
    }
}

/// A problem without fault; `supported` when the limit is met.
fn problem(limit: &str) -> String {
    fs::read_to_string(tests_folder("problems/decay.toml"))
        .expect("the sample")
        .replace("{limit}", limit)
}

#[test]
fn hand_exit_status_says_what_was_found() {
    let desk = Desk::new();
    fs::write(desk.path("met.toml"), problem("0.1 m")).expect("written");
    fs::write(desk.path("not_met.toml"), problem("1.9 m")).expect("written");
    for (arguments, expected) in [
        (&["trial", "met.toml"][..], 0),
        (&["trial", "met.toml", "--json"], 0),
        (&["trial", "not_met.toml"], 1),
        (&["issue", "met.toml", "--into", "out"], 0),
        (&["--help"], 0),
        (&["--version"], 0),
        (&[], 2),
        (&["tral", "met.toml"], 2),
        (&["trial"], 2),
        (&["trial", "absent.toml"], 2),
        (&["trial", "out"], 2),
    ] {
        let output = desk.run(arguments);
        assert_eq!(
            status(&output),
            expected,
            "{arguments:?}\n{}",
            standard_error(&output)
        );
        assert_eq!(
            expected == 2,
            !output.stderr.is_empty(),
            "{arguments:?}: standard error speaks of faults, and only of them"
        );
    }
    assert!(desk.below("home").is_empty());
}

#[test]
fn hand_trial_writes_nothing() {
    let desk = Desk::new();
    fs::write(desk.path("met.toml"), problem("0.1 m")).expect("written");
    let before = desk.below(".");
    desk.run(&["trial", "met.toml"]);
    assert_eq!(desk.below("."), before);
}

#[test]
fn hand_a_calculation_that_is_not_supported_is_issued() {
    let desk = Desk::new();
    fs::write(desk.path("not_met.toml"), problem("1.9 m")).expect("written");
    let output = desk.run(&["issue", "not_met.toml", "--into", "out"]);
    assert_eq!(status(&output), 1);
    assert!(
        desk.below("out")
            .iter()
            .any(|path| path.ends_with("data/record.pdf"))
    );
}

#[test]
fn hand_an_existing_package_is_left_alone() {
    let desk = Desk::new();
    fs::write(desk.path("met.toml"), problem("0.1 m")).expect("written");
    assert_eq!(
        status(&desk.run(&["issue", "met.toml", "--into", "out"])),
        0
    );
    let before = desk.below("out");
    let manifest = before
        .iter()
        .find(|path| path.ends_with("manifest-sha256.txt"))
        .expect("a manifest");
    fs::write(manifest, "mark").expect("marked");
    let output = desk.run(&["issue", "met.toml", "--into", "out"]);
    let said = standard_error(&output);
    assert_eq!(status(&output), 2, "{said}");
    let folder = manifest
        .parent()
        .and_then(Path::file_name)
        .and_then(|name| name.to_str())
        .expect("a folder");
    assert!(
        said.contains(folder),
        "the message names the package: {said}"
    );
    assert_eq!(desk.below("out"), before);
    assert_eq!(fs::read_to_string(manifest).expect("read"), "mark");
}

#[test]
fn hand_folders_that_cannot_be_written_to() {
    let desk = Desk::new();
    fs::write(desk.path("met.toml"), problem("0.1 m")).expect("written");
    let before = desk.below(".");
    // A file where a folder should be, below a file, and a folder that is not there; root may write anywhere else.
    for into in ["met.toml", "met.toml/out", "absent"] {
        let output = desk.run(&["issue", "met.toml", "--into", into]);
        let said = standard_error(&output);
        assert_eq!(status(&output), 2, "{into}: {said}");
        assert!(
            said.contains(into) && said.contains("nothing was written"),
            "{said}"
        );
        assert_eq!(desk.below("."), before, "{into}");
    }
}

#[cfg(target_os = "linux")]
#[test]
fn hand_a_machine_that_fails_is_status_4() {
    // The kernel's file system takes no new folders, whoever asks.
    let desk = Desk::new();
    fs::write(desk.path("met.toml"), problem("0.1 m")).expect("written");
    let output = desk.run(&["issue", "met.toml", "--into", "/proc"]);
    assert!(
        matches!(status(&output), 2 | 4),
        "{}",
        standard_error(&output)
    );
    assert!(standard_error(&output).contains("/proc"));
}

#[test]
fn hand_files_that_are_no_text() {
    let desk = Desk::new();
    let mut many = problem("0.1 m");
    for index in 0..10_001 {
        many.push_str(&format!("[[reference]]\nid = \"R{index}\"\ntext = \"x\"\n"));
    }
    for (name, bytes, code) in [
        (
            "latin.toml",
            b"format = 1\ntitle = \"caf\xe9\"\n".to_vec(),
            "T01",
        ),
        ("large.toml", vec![b'#'; (1 << 20) + 1], "T02"),
        ("many.toml", many.into_bytes(), "K11"),
    ] {
        fs::write(desk.path(name), bytes).expect("written");
        let output = desk.run(&["issue", name, "--into", "out"]);
        let said = standard_error(&output);
        assert_eq!(status(&output), 2, "{said}");
        assert!(
            said.contains(&format!("fault {code} in {name}, line ")) && said.contains("mend: "),
            "{name}: {said}"
        );
    }
    assert!(desk.below("out").is_empty());
}

#[test]
fn hand_an_unknown_key_is_answered_with_the_nearest() {
    let desk = Desk::new();
    let output = desk.run(&[
        "trial",
        tests_folder("faults/unknown_key.toml")
            .to_str()
            .expect("a path"),
    ]);
    assert!(
        standard_error(&output).contains("did you mean `source`?"),
        "{}",
        standard_error(&output)
    );
}
