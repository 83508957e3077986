//! What was issued, in the hands of others: recheck, zip, contrast, register, and packages made to harm.
//!
//! Every package is issued by the program itself, then damaged or forged with the library's own parts, so that a
//! forgery is consistent in everything but the one thing that the test is about.

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Output;

use countermarch::package::bag::{self, Bag, BagInfo, Payload};
use countermarch::package::{Limits, Source};
use countermarch::world;

use crate::cli::{Desk, standard_error, status};

mod compared;
mod hostile;

const DEMONSTRATIONS: [&str; 2] = ["break-tank", "break-tank-small-tank"];

fn problem(name: &str) -> String {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    root.join(format!("demo-data/{name}/{name}.toml"))
        .display()
        .to_string()
}

/// A folder to run in with the demonstrations issued below `out`, and their packages.
fn issued(arguments: &[&str]) -> (Desk, Vec<PathBuf>) {
    let desk = Desk::new();
    for name in DEMONSTRATIONS {
        let file = problem(name);
        let mut all = vec!["issue", file.as_str(), "--into", "out"];
        all.extend(arguments);
        let output = desk.run(&all);
        assert!(status(&output) <= 1, "{}", standard_error(&output));
    }
    let packages = listed(&desk.path("out"));
    assert_eq!(packages.len(), DEMONSTRATIONS.len());
    (desk, packages)
}

fn listed(folder: &Path) -> Vec<PathBuf> {
    let entries = fs::read_dir(folder).expect("a folder");
    let mut paths: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .collect();
    paths.sort();
    paths
}

fn text(path: &Path) -> &str {
    path.to_str().expect("a path")
}

fn said(output: &Output) -> String {
    String::from_utf8_lossy(&output.stdout).into_owned()
}

fn recheck(desk: &Desk, packages: &[&Path]) -> (i32, String) {
    let mut arguments = vec!["recheck"];
    arguments.extend(packages.iter().map(|package| text(package)));
    let output = desk.run(&arguments);
    assert_eq!(
        standard_error(&output),
        "",
        "a recheck says everything on standard output"
    );
    (status(&output), said(&output))
}

/// The recheck of one package fails for a reason that is said in one line.
fn check_refused(desk: &Desk, package: &Path, reason: &str) {
    let (status, said) = recheck(desk, &[package]);
    assert_eq!(status, 3, "{reason}: {said}");
    assert!(said.contains("FAILED"), "{said}");
    let fault = said
        .lines()
        .find(|line| line.trim_start().starts_with("fault: ") && line.contains(reason));
    assert!(fault.is_some(), "no line says `{reason}`:\n{said}");
    assert!(
        !said.chars().any(|c| c.is_control() && c != '\n'),
        "{said:?}"
    );
}

fn copy(from: &Path, to: &Path) {
    fs::create_dir_all(to).expect("a folder");
    for path in listed(from) {
        let target = to.join(path.file_name().expect("a name"));
        if path.is_dir() {
            copy(&path, &target);
        } else {
            fs::copy(&path, &target).expect("a copy");
        }
    }
}

fn read(package: &Path) -> Source {
    world::read_package(package, &Limits::READ).expect("a package that can be read")
}

fn bag_of(package: &Path) -> Bag {
    bag::read(read(package), &Limits::READ).expect("a bag")
}

fn write(files: &BTreeMap<String, Vec<u8>>, folder: &Path) {
    for (path, bytes) in files {
        let file = folder.join(path);
        fs::create_dir_all(file.parent().expect("a folder")).expect("a folder");
        fs::write(file, bytes).expect("a file");
    }
}

/// A package whose payload or fields were changed, with manifests that agree with the change.
fn forge(package: &Path, to: &Path, change: impl FnOnce(&mut Payload, &mut Vec<(String, String)>)) {
    let bag = bag_of(package);
    let mut payload: Payload = bag
        .payload()
        .map(|(path, bytes)| (path.to_owned(), bytes.to_vec()))
        .collect();
    let own = ["Bagging-Date", "Payload-Oxum", "Package-Digest"];
    let date = bag
        .info()
        .iter()
        .find(|(label, _)| label == "Bagging-Date")
        .expect("a date")
        .1
        .clone();
    let mut fields: Vec<(String, String)> = bag
        .info()
        .iter()
        .filter(|(label, _)| !own.contains(&label.as_str()))
        .cloned()
        .collect();
    change(&mut payload, &mut fields);
    let info = BagInfo {
        fields,
        bagging_date: date,
    };
    let forged = bag::build(payload, &info, &Limits::WRITTEN).expect("a consistent bag");
    write(forged.files(), to);
}

fn replace(payload: &mut Payload, path: &str, from: &str, to: &str) {
    let text = String::from_utf8(payload[path].clone()).expect("text");
    assert!(text.contains(from), "{path} holds no `{from}`");
    payload.insert(path.to_owned(), text.replacen(from, to, 1).into_bytes());
}

#[test]
fn prop_what_was_issued_is_reproduced_whatever_it_finds() {
    let (desk, folders) = issued(&[]);
    let zips = {
        for name in DEMONSTRATIONS {
            let output = desk.run(&["issue", &problem(name), "--into", "out", "--zip"]);
            assert!(status(&output) <= 1, "{}", standard_error(&output));
        }
        let all = listed(&desk.path("out"));
        assert_eq!(all.len(), 4, "nothing but the packages is left: {all:?}");
        all.into_iter()
            .filter(|path| path.is_file())
            .collect::<Vec<_>>()
    };
    let all: Vec<&Path> = folders.iter().chain(&zips).map(PathBuf::as_path).collect();
    let (status, said) = recheck(&desk, &all);
    assert_eq!(status, 0, "{said}");
    assert_eq!(
        said.matches("byte for byte; its finding: supported\n")
            .count(),
        2,
        "{said}"
    );
    assert_eq!(
        said.matches("byte for byte; its finding: not supported\n")
            .count(),
        2,
        "{said}"
    );
    assert!(
        said.ends_with("4 packages: 4 reproduced, 0 failed, 0 not rechecked\n"),
        "{said}"
    );
    // Folder and zip hold the same bytes, and the zip is the same whoever writes it.
    for (folder, zip) in folders.iter().zip(&zips) {
        assert_eq!(read(folder).files, read(zip).files);
        let output = desk.run(&["recheck", "--json", text(zip)]);
        let json: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
        assert_eq!(json["packages"][0]["outcome"], "reproduced");
        assert_eq!(json["failed"], 0);
    }
}

#[test]
fn hand_a_zip_is_written_once_and_never_over_another() {
    let (desk, zips) = issued(&["--zip"]);
    let before = fs::read(&zips[0]).expect("a zip");
    let output = desk.run(&[
        "issue",
        &problem(DEMONSTRATIONS[0]),
        "--into",
        "out",
        "--zip",
    ]);
    assert_eq!(status(&output), 2);
    assert!(
        standard_error(&output).contains("exists already"),
        "{}",
        standard_error(&output)
    );
    assert_eq!(fs::read(&zips[0]).expect("a zip"), before);
    assert_eq!(listed(&desk.path("out")).len(), 2);
}

#[test]
fn hand_a_consistent_forgery_is_not_reproduced() {
    let (desk, packages) = issued(&[]);
    let good = &packages[0];
    type Forgery = fn(&mut Payload, &mut Vec<(String, String)>);
    let forgeries: [(&str, Forgery, &str); 9] = [
        (
            "a result",
            |payload, _| replace(payload, "results/results.json", "13.8", "19.8"),
            "results.json`: differs",
        ),
        (
            "a word of the record",
            |payload, _| replace(payload, "record.md", "HS-217", "HS-218"),
            "record.md`: differs",
        ),
        (
            "a byte of the pages",
            |payload, _| {
                let page_file = payload.get_mut("record.pdf").expect("the pages");
                let last = page_file.len() - 1;
                page_file[last] = b' ';
            },
            "record.pdf`: differs",
        ),
        (
            "an input",
            |payload, _| replace(payload, "inputs/break-tank.toml", "15.0 m^2", "15.1 m^2"),
            "results.json`: differs",
        ),
        (
            "a file more",
            |payload, _| {
                payload.insert("results/more.csv".to_owned(), b"x".to_vec());
            },
            "more.csv`: the inputs give no such file",
        ),
        (
            "a file less",
            |payload, _| {
                payload.remove("figures/errors.svg");
            },
            "errors.svg`: the inputs give this file",
        ),
        (
            "another revision",
            |_, fields| fields[2].1 = "Z".to_owned(),
            "Calculation-Revision is `Z`",
        ),
        (
            "no problem file",
            |_, fields| fields.retain(|(label, _)| label != "Calculation-Problem"),
            "names no problem file",
        ),
        (
            "results that are none",
            |payload, _| {
                payload.insert("results/results.json".to_owned(), b"{}".to_vec());
            },
            "is not as results are written",
        ),
    ];
    for (index, (what, change, reason)) in forgeries.into_iter().enumerate() {
        let forged = desk.path(&format!("forged-{index}"));
        forge(good, &forged, change);
        assert!(
            bag::read(read(&forged), &Limits::READ).is_ok(),
            "{what}: the bag itself is sound"
        );
        check_refused(&desk, &forged, reason);
    }
}

#[test]
fn hand_a_package_of_another_version_is_compared_by_its_numbers() {
    let (desk, packages) = issued(&[]);
    let older = |name: &str, change: fn(&mut Payload)| {
        let forged = desk.path(name);
        forge(&packages[0], &forged, |payload, fields| {
            replace(
                payload,
                "results/results.json",
                "\"version\": \"",
                "\"version\": \"0.0.1-",
            );
            let agent = fields
                .iter_mut()
                .find(|(label, _)| label == "Bag-Software-Agent")
                .expect("the program");
            agent.1 = "countermarch 0.0.1".to_owned();
            change(payload);
        });
        forged
    };
    // Another layout of the pages is the right of another version.
    let sound = older("sound", |payload| {
        replace(payload, "record.md", "Finding", "Outcome")
    });
    let (status, said) = recheck(&desk, &[&sound]);
    assert_eq!(status, 0, "{said}");
    assert!(
        said.contains("10 results agree within their stated uncertainty; its finding: supported"),
        "{said}"
    );
    assert!(
        said.contains("all the same to the last digit")
            && said.contains("note: made by version `0.0.1-"),
        "{said}"
    );

    let close = older("close", |payload| {
        replace(payload, "results/results.json", "13.866549", "13.866560")
    });
    let (status, said) = recheck(&desk, &[&close]);
    assert_eq!(status, 0, "{said}");
    assert!(
        said.contains("the largest difference is 0.0000")
            && said.contains("in t_alarm of case base"),
        "{said}"
    );

    let far = older("far", |payload| {
        replace(payload, "results/results.json", "13.866549", "13.867549")
    });
    check_refused(&desk, &far, "more apart than the stated uncertainty allows");
    let other = older("other", |payload| {
        replace(payload, "results/results.json", "\"met\"", "\"not met\"")
    });
    check_refused(
        &desk,
        &other,
        "criterion K1: stated not met, recomputed met",
    );
    let input = older("input", |payload| {
        replace(payload, "inputs/break-tank.toml", "15.0 m^2", "15.1 m^2")
    });
    check_refused(&desk, &input, "the results are those of other inputs");
}

#[test]
fn hand_what_is_no_package_at_all() {
    let desk = Desk::new();
    for (arguments, expected) in [
        (vec!["recheck"], 2),
        (vec!["recheck", "nowhere"], 2),
        (vec!["recheck", "home"], 3),
        (vec!["contrast", "nowhere", "home"], 2),
        (vec!["register", "nowhere"], 2),
        (vec!["register", "home"], 0),
    ] {
        let output = desk.run(&arguments);
        assert_eq!(
            status(&output),
            expected,
            "{arguments:?}: {}{}",
            said(&output),
            standard_error(&output)
        );
    }
}
