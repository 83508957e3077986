//! The same problem file and program version give the same bytes, everywhere, and the package proves itself.

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};

use serde_json::Value;
use sha2::{Digest, Sha256};

use crate::cli::{Desk, standard_error, status};

/// Problem files whose packages are compared, below the repository's root, with the exit status of their issue.
const DEMONSTRATIONS: &[(&str, i32)] = &[
    ("demo-data/break-tank/break-tank.toml", 0),
    (
        "demo-data/break-tank-small-tank/break-tank-small-tank.toml",
        1,
    ),
];

/// Set to write the golden lists anew, after the version has been raised.
const REGENERATE: &str = "COUNTERMARCH_WRITE_GOLDEN";

type Package = BTreeMap<String, Vec<u8>>;

fn repository(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

/// Issues a demonstration from a copy of its folder; name of the package's folder and every file in it.
fn issue(
    problem: &str,
    expected_status: i32,
    desk: &Desk,
    source: &str,
    environment: &[(&str, &str)],
) -> (String, Package) {
    let problem = repository(problem);
    let folder = problem.parent().expect("a folder");
    fs::create_dir_all(desk.path(source)).expect("a folder");
    for entry in fs::read_dir(folder).expect("the demonstration's folder") {
        let entry = entry.expect("an entry");
        fs::copy(entry.path(), desk.path(source).join(entry.file_name())).expect("copied");
    }
    let file = format!(
        "{source}/{}",
        problem
            .file_name()
            .and_then(|name| name.to_str())
            .expect("a name")
    );
    let output = desk.run_in(&["issue", &file, "--into", "out"], environment);
    assert_eq!(
        status(&output),
        expected_status,
        "{file}: {}",
        standard_error(&output)
    );
    let mut folders = fs::read_dir(desk.path("out"))
        .expect("the packages")
        .map(|entry| entry.expect("an entry").path());
    let package = folders.next().expect("one package");
    assert!(folders.next().is_none(), "nothing but the package is left");
    let mut files = Package::new();
    collect(&package, "", &mut files);
    (
        package
            .file_name()
            .and_then(|name| name.to_str())
            .expect("a name")
            .to_owned(),
        files,
    )
}

fn collect(folder: &Path, below: &str, files: &mut Package) {
    for entry in fs::read_dir(folder).expect("a folder") {
        let entry = entry.expect("an entry");
        let name = format!("{below}{}", entry.file_name().to_str().expect("a name"));
        if entry.path().is_dir() {
            collect(&entry.path(), &format!("{name}/"), files);
        } else {
            files.insert(name, fs::read(entry.path()).expect("a file"));
        }
    }
}

fn issued(problem: &str, expected_status: i32) -> (String, Package) {
    issue(problem, expected_status, &Desk::new(), "source", &[])
}

fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes)
        .iter()
        .map(|byte| format!("{byte:02x}"))
        .collect()
}

fn text<'a>(package: &'a Package, file: &str) -> &'a str {
    std::str::from_utf8(&package[file]).expect("UTF-8")
}

#[test]
fn prop_packages_are_the_same_in_every_folder_and_environment() {
    for (problem, expected_status) in DEMONSTRATIONS {
        let first = issue(problem, *expected_status, &Desk::new(), "a", &[]);
        let elsewhere = [
            ("TZ", "Pacific/Kiritimati"),
            ("LANG", "tr_TR.UTF-8"),
            ("LC_ALL", "de_DE.UTF-8"),
            ("RAYON_NUM_THREADS", "3"),
            ("SOURCE_DATE_EPOCH", "1"),
            ("USER", "someone"),
            ("HOSTNAME", "elsewhere"),
            ("NO_COLOR", "1"),
            ("RUST_BACKTRACE", "1"),
        ];
        let second = issue(
            problem,
            *expected_status,
            &Desk::new(),
            "another folder/with a long name, and ümlaut",
            &elsewhere,
        );
        assert_eq!(first.0, second.0, "name of the folder");
        let names = |package: &Package| package.keys().cloned().collect::<Vec<_>>();
        assert_eq!(names(&first.1), names(&second.1));
        let differing: Vec<&String> = first
            .1
            .keys()
            .filter(|name| first.1[*name] != second.1[*name])
            .collect();
        assert!(differing.is_empty(), "{problem}: {differing:?} differ");
    }
}

#[test]
fn regress_payload_bytes_change_with_the_version_only() {
    for (problem, expected_status) in DEMONSTRATIONS {
        let stem = Path::new(problem)
            .file_stem()
            .and_then(|stem| stem.to_str())
            .expect("a name");
        let (_, package) = issued(problem, *expected_status);
        let mut list = format!("# version {}\n", env!("CARGO_PKG_VERSION"));
        for (name, bytes) in package.iter().filter(|(name, _)| name.starts_with("data/")) {
            list.push_str(&format!("{}  {name}\n", sha256(bytes)));
        }
        let path = repository(&format!("tests/it/golden/{stem}.sha256"));
        if std::env::var_os(REGENERATE).is_some() {
            fs::write(&path, &list).expect("the golden list is written");
            continue;
        }
        let golden = fs::read_to_string(&path).unwrap_or_default();
        let differing: Vec<&str> = list
            .lines()
            .filter(|line| !golden.lines().any(|other| other == *line))
            .collect();
        assert!(
            golden == list,
            "bytes of the payload have changed:\n{}\nWhoever holds a package of version {} could no longer reproduce it. If the change is \
             meant, raise the version in Cargo.toml, say in the release notes what changed, and run the tests once with {REGENERATE}=1.",
            differing.join("\n"),
            env!("CARGO_PKG_VERSION"),
        );
    }
}

#[test]
fn hand_manifests_hold_by_recomputation() {
    for (problem, expected_status) in DEMONSTRATIONS {
        let (folder, package) = issued(problem, *expected_status);
        assert_eq!(
            text(&package, "bagit.txt"),
            "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"
        );
        let is_payload = |name: &&String| name.starts_with("data/");
        let lists = [
            (
                "manifest-sha256.txt",
                package.keys().filter(is_payload).collect::<Vec<_>>(),
            ),
            (
                "tagmanifest-sha256.txt",
                package
                    .keys()
                    .filter(|name| {
                        !is_payload(name)
                            && *name != "tagmanifest-sha256.txt"
                            && !name.starts_with("signatures/")
                    })
                    .collect(),
            ),
        ];
        for (manifest, mut listed) in lists {
            // RFC 8493 leaves the order open; ours is that of the bytes.
            listed.sort();
            let expected: String = listed
                .iter()
                .map(|name| format!("{}  {name}\n", sha256(&package[*name])))
                .collect();
            assert_eq!(text(&package, manifest), expected, "{manifest}");
        }
        let payload: Vec<&Vec<u8>> = package
            .iter()
            .filter(|(name, _)| is_payload(name))
            .map(|(_, bytes)| bytes)
            .collect();
        let oxum = format!(
            "Payload-Oxum: {}.{}\n",
            payload.iter().map(|bytes| bytes.len()).sum::<usize>(),
            payload.len()
        );
        let info = text(&package, "bag-info.txt");
        assert!(info.contains(&oxum), "{oxum}{info}");
        let package_digest = sha256(&package["manifest-sha256.txt"]);
        assert!(
            info.replace("\n ", "").contains(&package_digest),
            "bag-info.txt states the package digest {package_digest}\n{info}"
        );

        // The content fingerprint: the manifest without the two files of the record.
        let is_content = |line: &&str| {
            !line.ends_with("  data/record.pdf") && !line.ends_with("  data/record.md")
        };
        let content: String = text(&package, "manifest-sha256.txt")
            .lines()
            .filter(is_content)
            .map(|line| format!("{line}\n"))
            .collect();
        let fingerprint = sha256(content.as_bytes());
        assert!(
            text(&package, "data/record.md").contains(&fingerprint),
            "the record states the content fingerprint {fingerprint}"
        );
        assert!(
            folder.ends_with(&fingerprint[..8])
                || !folder.contains("for-check") && !folder.contains("preliminary"),
            "{folder}"
        );
        for (name, bytes) in package.iter().filter(|(name, _)| is_payload(name)) {
            let holds = |digest: &str| bytes.windows(64).any(|window| window == digest.as_bytes());
            assert!(!holds(&package_digest), "{name} states the package digest");
            assert!(
                name.contains("record.") || !holds(&fingerprint),
                "{name} states the content fingerprint, which covers it"
            );
        }
    }
}

#[test]
fn hand_inputs_are_enclosed_as_read() {
    for (problem, expected_status) in DEMONSTRATIONS {
        let (_, package) = issued(problem, *expected_status);
        let folder = repository(problem).parent().expect("a folder").to_owned();
        let mut enclosed = 0;
        for (name, bytes) in &package {
            if let Some(input) = name.strip_prefix("data/inputs/") {
                assert_eq!(
                    &fs::read(folder.join(input)).expect("the file as it was"),
                    bytes,
                    "{input}"
                );
                enclosed += 1;
            }
        }
        assert!(
            enclosed >= 2,
            "the problem file and the files that it names"
        );
        for file in [
            "data/READ-ME.txt",
            "data/record.pdf",
            "data/record.md",
            "data/results/results.json",
            "data/results/history-base.csv",
        ] {
            assert!(package.contains_key(file), "{file} is missing");
        }
        assert!(
            package
                .keys()
                .any(|name| name.starts_with("data/figures/") && name.ends_with(".svg"))
        );
    }
}

/// Keys of each object of results.json, as the problem format documents them.
const RESULTS: &[&str] = &["format", "program", "inputs_sha256", "finding", "cases"];
const PROGRAM: &[&str] = &["name", "version"];
const CASE: &[&str] = &["id", "results", "criteria", "stop"];
const RESULT: &[&str] = &[
    "symbol",
    "unit",
    "value",
    "numerical_uncertainty",
    "extrapolated",
    "observed_order",
    "formal_order",
    "convergence",
    "input_interval",
    "band",
    "coverage",
    "alternate",
    "absent",
];
const CRITERION: &[&str] = &["id", "finding", "margin", "margin_of_band", "unit"];
const STOP: &[&str] = &["reason", "at", "unit"];
const CONVERGENCE: &[&str] = &[
    "asymptotic",
    "order reduced",
    "order irregular",
    "oscillatory",
    "not converged",
    "at round-off",
    "discrete",
];

fn keys(value: &Value, expected: &[&str]) {
    let found: BTreeSet<&str> = value
        .as_object()
        .unwrap_or_else(|| panic!("an object, not {value}"))
        .keys()
        .map(String::as_str)
        .collect();
    assert_eq!(found, expected.iter().copied().collect());
}

fn word(value: &Value, words: &[&str]) {
    assert!(
        value.as_str().is_some_and(|found| words.contains(&found)),
        "{value} is none of {words:?}"
    );
}

fn list(value: &Value) -> &[Value] {
    value
        .as_array()
        .unwrap_or_else(|| panic!("an array, not {value}"))
}

#[test]
fn hand_results_json_is_as_documented() {
    for (problem, expected_status) in DEMONSTRATIONS {
        let (_, package) = issued(problem, *expected_status);
        let results: Value =
            serde_json::from_str(text(&package, "data/results/results.json")).expect("JSON");
        keys(&results, RESULTS);
        keys(&results["program"], PROGRAM);
        assert_eq!(results["format"], 1);
        assert_eq!(results["program"]["version"], env!("CARGO_PKG_VERSION"));
        word(
            &results["finding"],
            if *expected_status == 0 {
                &["supported", "supported with holds"]
            } else {
                &["not supported"]
            },
        );
        assert_eq!(list(&results["cases"])[0]["id"], "base");
        for case in list(&results["cases"]) {
            keys(case, CASE);
            keys(&case["stop"], STOP);
            for result in list(&case["results"]) {
                keys(result, RESULT);
                word(&result["convergence"], CONVERGENCE);
                assert_eq!(
                    result["absent"]
                        .as_bool()
                        .map(|absent| absent && !result["value"].is_null()),
                    Some(false),
                    "{result}"
                );
                if let (Some(value), Some(half)) = (
                    result["value"].as_f64(),
                    result["numerical_uncertainty"].as_f64(),
                ) {
                    let band = list(&result["band"]);
                    let reaches = (band[0].as_f64(), band[1].as_f64());
                    let (Some(low), Some(high)) = reaches else {
                        panic!("{result}: a band has two numbers")
                    };
                    let slack = 1e-12 * value.abs();
                    assert!(
                        low <= value - half + slack && high >= value + half - slack,
                        "{result}: the band holds the numerical uncertainty"
                    );
                }
            }
            for criterion in list(&case["criteria"]) {
                keys(criterion, CRITERION);
                word(&criterion["finding"], &["met", "not met", "not resolved"]);
            }
        }
    }
}

#[test]
fn prop_trial_prints_the_results_that_a_package_holds() {
    for (problem, expected_status) in DEMONSTRATIONS {
        let (_, package) = issued(problem, *expected_status);
        let output = Desk::new().run(&[
            "trial",
            repository(problem).to_str().expect("a path"),
            "--json",
        ]);
        assert_eq!(status(&output), *expected_status);
        assert_eq!(
            String::from_utf8_lossy(&output.stdout),
            text(&package, "data/results/results.json")
        );
    }
}
