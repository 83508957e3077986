//! Packages made to harm or to mislead, and packages that were damaged: each is refused for a reason in one line.

use super::*;
use crate::random::Random;

/// Every byte of small files, a thousand of large ones: the bag alone finds it, before anything is solved.
#[test]
fn prop_any_flipped_byte_is_found() {
    const SMALL: usize = 2048;
    let (_desk, packages) = issued(&[]);
    let source = read(&packages[0]);
    let mut random = Random::new(2);
    let mut n_flips = 0;
    for (path, bytes) in &source.files {
        let places: Vec<usize> = match bytes.len() {
            length if length <= SMALL => (0..length).collect(),
            length => (0..1000).map(|_| random.below(length)).collect(),
        };
        for at in places {
            let mut damaged = source.clone();
            let flip = 1 << random.below(8);
            damaged.files.get_mut(path).expect("the file")[at] ^= flip;
            assert!(
                bag::read(damaged, &Limits::READ).is_err(),
                "byte {at} of {path} flipped by {flip}"
            );
            n_flips += 1;
        }
    }
    assert!(n_flips > 10_000, "{n_flips}");
}

#[test]
fn prop_a_flipped_byte_of_each_file_fails_the_recheck_and_names_the_file() {
    let (desk, packages) = issued(&[]);
    let mut random = Random::new(3);
    let files = read(&packages[0]).files;
    let mut damaged = Vec::new();
    for (index, (path, bytes)) in files.iter().enumerate() {
        let folder = desk.path(&format!("damaged-{index}"));
        copy(&packages[0], &folder);
        let mut bytes = bytes.clone();
        let at = random.below(bytes.len());
        bytes[at] ^= 1 << random.below(8);
        fs::write(folder.join(path), bytes).expect("the damage");
        damaged.push((folder, path.clone()));
    }
    let folders: Vec<&Path> = damaged.iter().map(|(folder, _)| folder.as_path()).collect();
    let (status, said) = recheck(&desk, &folders);
    assert_eq!(status, 3);
    let reports: Vec<&str> = said.split("FAILED").skip(1).collect();
    assert_eq!(reports.len(), damaged.len(), "{said}");
    for (report, (_, path)) in reports.iter().zip(&damaged) {
        // Damage to the tag manifest shows in what it lists.
        assert!(
            report.contains(path.as_str()) || path == "tagmanifest-sha256.txt",
            "{path}: {report}"
        );
    }
}

#[test]
fn prop_random_damage_of_a_zip_never_passes_or_panics() {
    let (desk, zips) = issued(&["--zip"]);
    let zip = fs::read(&zips[0]).expect("a zip");
    let mut random = Random::new(4);
    let path = desk.path("damaged.zip");
    for round in 0..200 {
        let mut bytes = zip.clone();
        match round % 4 {
            0 => bytes.truncate(random.below(zip.len())),
            1 => bytes.insert(random.below(zip.len()), random.next() as u8),
            // The directory at the end is where a zip is most easily lied about.
            2 => {
                let at = zip.len() - 1 - random.below(2000);
                bytes[at] ^= 1 << random.below(8);
            }
            _ => {
                let at = random.below(zip.len());
                bytes[at] ^= 1 << random.below(8);
            }
        }
        fs::write(&path, &bytes).expect("the damage");
        let found = world::read_package(&path, &Limits::READ);
        let intact = found.is_ok_and(|source| bag::read(source, &Limits::READ).is_ok());
        assert!(!intact, "round {round}");
    }
    check_refused(&desk, &path, "");
}

#[test]
fn hand_problem_files_of_strangers_are_refused_within_a_package() {
    let (desk, packages) = issued(&[]);
    let path = "inputs/break-tank.toml";
    let cases: [(&str, &str, &str, &str); 5] = [
        ("nan", "0.61\n", "nan\n", "line "),
        ("hidden", "Maren", "Mar\u{202e}en", "U+202E"),
        (
            "endless",
            "step         = \"10 s\"",
            "step         = \"0.00001 s\"",
            "allow them with --allow-work",
        ),
        (
            "too many",
            "step         = \"10 s\"",
            "step         = \"1e-9 s\"",
            "--allow-work",
        ),
        (
            "outside",
            "file          = \"run-down.csv\"",
            "file          = \"../run-down.csv\"",
            "line ",
        ),
    ];
    for (name, from, to, reason) in cases {
        let forged = desk.path(name);
        forge(&packages[0], &forged, |payload, _| {
            replace(payload, path, from, to)
        });
        check_refused(&desk, &forged, reason);
    }
    let large = desk.path("large");
    forge(&packages[0], &large, |payload, _| {
        let more = format!(
            "{}# {}\n",
            String::from_utf8_lossy(&payload[path]),
            "x".repeat(1 << 20)
        );
        payload.insert(path.to_owned(), more.into_bytes());
    });
    check_refused(&desk, &large, "at most 1048576");
    let missing = desk.path("missing");
    forge(&packages[0], &missing, |payload, _| {
        payload.remove("inputs/run-down.csv");
    });
    check_refused(&desk, &missing, "no such file");
    // A picture nested deeper than any stack.
    let deep = desk.path("deep");
    forge(&packages[0], &deep, |payload, _| {
        let picture = format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\">{}{}</svg>",
            "<g>".repeat(200_000),
            "</g>".repeat(200_000)
        );
        for path in ["inputs/sketch.svg", "attachments/sketch.svg"] {
            payload.insert(path.to_owned(), picture.clone().into_bytes());
        }
    });
    check_refused(&desk, &deep, "");
    // The budget can be raised, or lowered until nothing is solved.
    let output = desk.run(&["recheck", text(&packages[0]), "--allow-work", "10"]);
    assert_eq!(status(&output), 3);
    assert!(
        said(&output).contains("10 are allowed"),
        "{}",
        said(&output)
    );
}

#[test]
fn hand_zips_made_to_harm() {
    let (desk, zips) = issued(&["--zip"]);
    let zip = fs::read(&zips[0]).expect("a zip");
    let name = "HS-217-CAL-004_B/bag-info.txt";
    let swapped = |from: &str, to: &str| {
        assert_eq!(from.len(), to.len());
        let mut bytes = zip.clone();
        while let Some(at) = bytes
            .windows(from.len())
            .position(|window| window == from.as_bytes())
        {
            bytes[at..at + to.len()].copy_from_slice(to.as_bytes());
        }
        bytes
    };
    let with = |at: usize, byte: u8| {
        let mut bytes = zip.clone();
        bytes[at] = byte;
        bytes
    };
    let central = zip
        .windows(4)
        .rposition(|window| window == b"PK\x01\x02")
        .expect("a directory");
    let cases: Vec<(&str, Vec<u8>, &str)> = vec![
        (
            "bytes before",
            [b"MZ".as_slice(), &zip].concat(),
            "bytes before",
        ),
        (
            "bytes after",
            [zip.as_slice(), b"\0"].concat(),
            "bytes after",
        ),
        ("truncated", zip[..zip.len() / 2].to_vec(), "truncated"),
        ("no zip", b"#!/bin/sh\nexit 0\n".to_vec(), "not a zip"),
        ("empty", Vec::new(), "not a zip"),
        (
            "parent",
            swapped(name, "HS-217-CAL-004_B/../../../.tx"),
            "leaves its folder",
        ),
        (
            "absolute",
            swapped(name, "/S-217-CAL-004_B/bag-info.txt"),
            "absolute",
        ),
        (
            "back-slash",
            swapped(name, "HS-217-CAL-004_B\\bag-info.txt"),
            "back-slash",
        ),
        (
            "device",
            swapped(name, "HS-217-CAL-004_B/aux.info.txt"),
            "device's name",
        ),
        (
            "trailing dot",
            swapped(name, "HS-217-CAL-004_B/bag-info.tx."),
            "ends in a dot or space",
        ),
        (
            "line break",
            swapped(name, "HS-217-CAL-004_B/bag\ninfo.txt"),
            "control character",
        ),
        (
            "two top folders",
            swapped(name, "HS-217-CAL-005_B/bag-info.txt"),
            "two top folders",
        ),
        ("encrypted", with(6, 1), ""),
        ("compressed", with(8, 8), ""),
        ("symbolic link", with(central + 41, 0xa1), "a link"),
        ("pipe", with(central + 41, 0x11), "a pipe"),
    ];
    let before = listed(&desk.path("")).len();
    for (what, bytes, reason) in cases {
        let path = desk.path("hostile.zip");
        fs::write(&path, bytes).expect("a zip");
        check_refused(&desk, &path, reason);
        let output = desk.run(&["contrast", text(&zips[0]), text(&path)]);
        assert_eq!(status(&output), 3, "{what}: {}", standard_error(&output));
        let output = desk.run(&["register", text(&path)]);
        assert_eq!(status(&output), 2, "{what}: a register is of a folder");
        fs::remove_file(&path).expect("it was there");
    }
    assert_eq!(listed(&desk.path("")).len(), before, "nothing was written");
}

#[cfg(unix)]
#[test]
fn hand_folders_made_to_harm() {
    use std::os::unix::fs::symlink;
    use std::process::Command;

    let (desk, packages) = issued(&[]);
    let outside = desk.path("outside.txt");
    fs::write(&outside, "secret").expect("a file");
    type Harm = fn(&Path, &Path);
    let harms: [(&str, Harm, &str); 12] = [
        (
            "link",
            |package, outside| symlink(outside, package.join("data/more.txt")).expect("a link"),
            "a link",
        ),
        (
            "link to a folder",
            |package, _| symlink("/", package.join("data/more")).expect("a link"),
            "a link",
        ),
        (
            "hard link",
            |package, _| {
                fs::hard_link(package.join("data/record.md"), package.join("data/more"))
                    .expect("a link")
            },
            "hard link",
        ),
        (
            "pipe",
            |package, _| {
                let made = Command::new("mkfifo")
                    .arg(package.join("data/more"))
                    .status()
                    .expect("mkfifo");
                assert!(made.success());
            },
            "pipe",
        ),
        (
            "fetch",
            |package, _| {
                fs::write(package.join("fetch.txt"), "http://x 1 data/y\n").expect("a file")
            },
            "fetches nothing",
        ),
        (
            "unlisted payload",
            |package, _| fs::write(package.join("data/more"), "x").expect("a file"),
            "not listed in manifest",
        ),
        (
            "unlisted tag file",
            |package, _| fs::write(package.join("more"), "x").expect("a file"),
            "not listed in tagmanifest",
        ),
        (
            "missing",
            |package, _| fs::remove_file(package.join("data/record.md")).expect("a file"),
            "listed in manifest-sha256.txt, but missing",
        ),
        (
            "no tag manifest",
            |package, _| fs::remove_file(package.join("tagmanifest-sha256.txt")).expect("a file"),
            "the file is missing",
        ),
        (
            "UTF-16",
            |package, _| fs::write(package.join("bagit.txt"), [0xff, 0xfe, 66, 0]).expect("a file"),
            "UTF-16",
        ),
        (
            "other version",
            |package, _| {
                fs::write(
                    package.join("bagit.txt"),
                    "BagIt-Version: 0.97\nTag-File-Character-Encoding: UTF-8\n",
                )
                .expect("a file")
            },
            "BagIt version `0.97`",
        ),
        (
            "no signature",
            |package, _| {
                fs::create_dir(package.join("signatures")).expect("a folder");
                fs::write(package.join("signatures/run.sh"), "x").expect("a file");
            },
            "no such file belongs into signatures/",
        ),
    ];
    for (index, (what, harm, reason)) in harms.into_iter().enumerate() {
        let folder = desk.path(&format!("harm-{index}"));
        copy(&packages[0], &folder);
        harm(&folder, &outside);
        check_refused(&desk, &folder, reason);
        let output = desk.run(&["contrast", text(&folder), text(&packages[0])]);
        let expected = if what == "no signature" { 0 } else { 3 };
        assert_eq!(
            status(&output),
            expected,
            "{what}: {}",
            standard_error(&output)
        );
    }
    let linked = desk.path("linked");
    symlink(&packages[0], &linked).expect("a link");
    check_refused(&desk, &linked, "the package is a link");
    assert_eq!(fs::read_to_string(&outside).expect("the file"), "secret");
}
