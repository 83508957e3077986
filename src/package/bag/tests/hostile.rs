//! A bag that was changed: each way has its reason, and no way passes.

use super::*;
use crate::package::digest::DigestFault;
use crate::package::finding::{BagFault, EncodingFault, FolderFault, LineFault};

/// Changes the files of a good bag and returns what the reader finds.
fn faults_after(change: impl FnOnce(&mut BTreeMap<String, Vec<u8>>)) -> Vec<BagFault> {
    let mut files = small_bag().files;
    change(&mut files);
    let findings = read_files(files).expect_err("must be refused");
    let fault = |finding: Finding| match finding {
        Finding::Bag(fault) => {
            let line = fault.to_string();
            assert!(!line.is_empty() && !line.contains('\n'), "{line}");
            fault
        }
        other => panic!("{other:?}"),
    };
    findings.into_iter().map(fault).collect()
}

/// Changes one tag file and makes the tag manifest agree, so that only the change itself is found.
fn faults_after_retagged(path: &str, change: impl Fn(&str) -> Vec<u8>) -> Vec<BagFault> {
    faults_after(|files| {
        let text = String::from_utf8(files[path].clone()).unwrap();
        files.insert(path.to_owned(), change(&text));
        retag(files);
    })
}

fn retag(files: &mut BTreeMap<String, Vec<u8>>) {
    let is_tag = |path: &str| {
        !path.starts_with("data/") && !path.starts_with(SIGNATURES) && path != TAG_MANIFEST
    };
    let tags = files
        .iter()
        .filter(|(path, _)| is_tag(path))
        .map(|(path, bytes)| (path.clone(), bytes.clone()));
    let text = manifest::write(&manifest::of(&tags.collect()));
    files.insert(TAG_MANIFEST.to_owned(), text.into_bytes());
}

fn line(file: &'static str, number: usize, fault: LineFault) -> BagFault {
    BagFault::Line {
        file,
        number,
        fault,
    }
}

#[test]
fn prop_every_flipped_bit_is_found() {
    let files = small_bag().files;
    for (path, bytes) in &files {
        for at in 0..bytes.len() {
            for bit in 0..8 {
                let mut changed = files.clone();
                changed.get_mut(path).unwrap()[at] ^= 1 << bit;
                assert!(read_files(changed).is_err(), "{path}, byte {at}, bit {bit}");
            }
        }
    }
}

#[test]
fn prop_every_shortened_lengthened_or_missing_file_is_found() {
    let files = small_bag().files;
    for (path, bytes) in &files {
        let mut changed = files.clone();
        changed.remove(path);
        assert!(read_files(changed).is_err(), "{path} missing");
        for length in 0..bytes.len() {
            let mut changed = files.clone();
            changed.get_mut(path).unwrap().truncate(length);
            assert!(read_files(changed).is_err(), "{path} cut to {length}");
        }
        for byte in [b'\n', b' ', 0] {
            let mut changed = files.clone();
            changed.get_mut(path).unwrap().push(byte);
            assert!(read_files(changed).is_err(), "{path} with {byte}");
        }
    }
}

#[test]
fn hand_files_that_do_not_belong() {
    let add = |path: &str| faults_after(|files| drop(files.insert(path.to_owned(), vec![])));
    assert_eq!(add("fetch.txt"), [BagFault::Fetch]);
    assert_eq!(
        add("notes.txt"),
        [BagFault::UnlistedTagFile {
            path: "notes.txt".into()
        }]
    );
    assert_eq!(
        add("Signatures/x"),
        [BagFault::UnlistedTagFile {
            path: "Signatures/x".into()
        }]
    );
    assert_eq!(
        add("manifest-md5.txt"),
        [BagFault::UnlistedTagFile {
            path: "manifest-md5.txt".into()
        }]
    );
    let unlisted = add("data/extra");
    assert!(unlisted.contains(&BagFault::UnlistedPayload {
        path: "data/extra".into()
    }));
    assert!(
        matches!(unlisted[..], [_, BagFault::Oxum { .. }]),
        "{unlisted:?}"
    );
    let listed = faults_after(|files| {
        files.insert("notes.txt".into(), vec![]);
        retag(files);
    });
    assert_eq!(
        listed,
        [BagFault::ForeignTagFile {
            path: "notes.txt".into()
        }]
    );
}

#[test]
fn hand_missing_files() {
    let removed = faults_after(|files| drop(files.remove("data/record.md")));
    assert_eq!(
        removed[0],
        BagFault::ListedButMissing {
            path: "data/record.md".into(),
            by: MANIFEST
        }
    );
    assert!(
        matches!(removed[..], [_, BagFault::Oxum { .. }]),
        "{removed:?}"
    );
    let tag = faults_after(|files| drop(files.remove("bagit.txt")));
    let missing = BagFault::MissingTagFile {
        path: "bagit.txt".into(),
    };
    assert_eq!(
        tag,
        [
            missing,
            BagFault::ListedButMissing {
                path: "bagit.txt".into(),
                by: TAG_MANIFEST
            }
        ]
    );
    let everything = faults_after(BTreeMap::clear);
    assert_eq!(everything.len(), 5);
    assert!(everything.contains(&BagFault::NoPayload));
}

#[test]
fn hand_a_tag_manifest_lists_all_and_only_tag_files() {
    let without = faults_after(|files| {
        let text = String::from_utf8(files[TAG_MANIFEST].clone()).unwrap();
        let kept: String = text
            .lines()
            .skip(1)
            .map(|line| format!("{line}\n"))
            .collect();
        files.insert(TAG_MANIFEST.into(), kept.into_bytes());
    });
    assert_eq!(
        without,
        [BagFault::UnlistedTagFile {
            path: "bag-info.txt".into()
        }]
    );
    for (path, fault) in [
        ("data/record.md", LineFault::Payload),
        ("signatures/a.p7s", LineFault::Signature),
    ] {
        let with = faults_after(|files| {
            let extra = format!("{}  {path}\n", Digest::of(b"# Record\n"));
            files.get_mut(TAG_MANIFEST).unwrap().extend(extra.bytes());
        });
        assert_eq!(with, [line(TAG_MANIFEST, 4, fault)]);
    }
}

#[test]
fn hand_each_malformed_manifest_line() {
    let good = Digest::of(b"read me\n").to_string();
    for (first_line, fault) in [
        (
            format!("{good}  data/../../READ-ME.txt"),
            LineFault::Name(NameFault::Parent),
        ),
        (
            format!("{good}  /data/READ-ME.txt"),
            LineFault::Name(NameFault::Absolute),
        ),
        (
            format!("{good}  ./data/READ-ME.txt"),
            LineFault::Name(NameFault::EmptyOrDotPart),
        ),
        (
            format!("{good}  data\\READ-ME.txt"),
            LineFault::Name(NameFault::Backslash),
        ),
        (
            format!("{good}  data/%2e%2e/READ-ME.txt"),
            LineFault::EncodedPath,
        ),
        (
            format!("{good}  data/READ%0AME.txt"),
            LineFault::EncodedPath,
        ),
        (format!("{good}  READ-ME.txt"), LineFault::NotPayload),
        (format!("{good} data/READ-ME.txt"), LineFault::NoSeparator),
        (format!("{good} *data/READ-ME.txt"), LineFault::NoSeparator),
        (
            format!("{good}   data/READ-ME.txt"),
            LineFault::Name(NameFault::EndsInDotOrSpace),
        ),
        (
            format!("{good}  data/READ-ME.txt\r"),
            LineFault::CarriageReturn,
        ),
        (String::new(), LineFault::NoSeparator),
        (
            format!("{}  data/READ-ME.txt", &good[1..]),
            LineFault::Digest(DigestFault::Length { found: 63 }),
        ),
        (
            format!("{}  data/READ-ME.txt", good.to_uppercase()),
            LineFault::Digest(DigestFault::UpperCase),
        ),
        (
            format!("{}z  data/READ-ME.txt", &good[1..]),
            LineFault::Digest(DigestFault::NotHexadecimal),
        ),
        (format!("{good}  data/zzz"), LineFault::OutOfOrder),
    ] {
        let faults = faults_after_retagged(MANIFEST, |text| {
            let rest = text.split_once('\n').unwrap().1;
            format!("{first_line}\n{rest}").into_bytes()
        });
        let number = if fault == LineFault::OutOfOrder { 2 } else { 1 };
        assert!(
            faults.contains(&line(MANIFEST, number, fault)),
            "{first_line:?}: {faults:?}"
        );
    }
    let twice = faults_after_retagged(MANIFEST, |text| {
        let first = text.split_once('\n').unwrap().0;
        format!("{first}\n{text}").into_bytes()
    });
    assert!(
        twice.contains(&line(MANIFEST, 2, LineFault::Duplicate)),
        "{twice:?}"
    );
    let unfinished = faults_after_retagged(MANIFEST, |text| text.trim_end().as_bytes().to_vec());
    assert!(unfinished.contains(&BagFault::NoFinalLineBreak { file: MANIFEST }));
}

#[test]
fn hand_a_wrong_digest_names_the_file() {
    let good = Digest::of(b"read me\n");
    let other = Digest::of(b"other");
    let faults = faults_after_retagged(MANIFEST, |text| {
        text.replace(&good.to_string(), &other.to_string())
            .into_bytes()
    });
    let expected = BagFault::DigestDiffers {
        path: "data/READ-ME.txt".into(),
        listed: other,
        found: good,
    };
    assert!(faults.contains(&expected), "{faults:?}");
    assert!(
        matches!(faults[..], [_, BagFault::PackageDigest { .. }]),
        "{faults:?}"
    );
}

#[test]
fn hand_too_many_lines_are_not_read() {
    let limits = Limits {
        n_entries: 3,
        ..Limits::READ
    };
    let findings = read(
        Source {
            files: small_bag().files,
            findings: vec![],
        },
        &limits,
    )
    .unwrap_err();
    assert!(findings.contains(&Finding::Bag(BagFault::TooManyLines {
        file: MANIFEST,
        limit: 3
    })));
}

#[test]
fn hand_encodings_and_versions() {
    let utf16 = |text: &str| {
        text.encode_utf16()
            .flat_map(u16::to_le_bytes)
            .collect::<Vec<u8>>()
    };
    let marked_utf16 = |text: &str| utf16(&format!("\u{feff}{text}"));
    let marked = |text: &str| format!("\u{feff}{text}").into_bytes();
    let latin = |text: &str| [text.as_bytes(), b"\xe9"].concat();
    for path in [DECLARATION, INFO, MANIFEST] {
        let encoding = |fault| BagFault::Encoding {
            path: path.to_owned(),
            fault,
        };
        let found = |change: &dyn Fn(&str) -> Vec<u8>| faults_after_retagged(path, change);
        assert!(
            found(&utf16).contains(&encoding(EncodingFault::Utf16)),
            "{path}"
        );
        assert!(
            found(&marked_utf16).contains(&encoding(EncodingFault::Utf16)),
            "{path}"
        );
        assert!(
            found(&marked).contains(&encoding(EncodingFault::ByteOrderMark)),
            "{path}"
        );
        assert!(
            found(&latin).contains(&encoding(EncodingFault::NotUtf8)),
            "{path}"
        );
    }
    let declared =
        |text: &'static str| faults_after_retagged(DECLARATION, move |_| text.as_bytes().to_vec());
    let other = |version: &str| {
        [BagFault::OtherVersion {
            version: version.to_owned(),
        }]
    };
    assert_eq!(
        declared("BagIt-Version: 0.97\nTag-File-Character-Encoding: UTF-8\n"),
        other("0.97")
    );
    assert_eq!(
        declared("BagIt-Version: 1.1\nTag-File-Character-Encoding: UTF-8\n"),
        other("1.1")
    );
    for text in [
        "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-16\n",
        "BagIt-Version: 1.0\r\nTag-File-Character-Encoding: UTF-8\r\n",
        "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8",
        "Tag-File-Character-Encoding: UTF-8\nBagIt-Version: 1.0\n",
        "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\nMore: x\n",
    ] {
        assert_eq!(declared(text), [BagFault::Declaration], "{text:?}");
    }
}

#[test]
fn hand_bag_info() {
    let changed = |from: &'static str, to: &'static str| {
        faults_after_retagged(INFO, move |text| {
            assert!(text.contains(from));
            text.replacen(from, to, 1).into_bytes()
        })
    };
    let oxum = |listed: &str| {
        [BagFault::Oxum {
            listed: listed.to_owned(),
            found: "32.4".to_owned(),
        }]
    };
    assert_eq!(changed("32.4", "31.4"), oxum("31.4"));
    assert_eq!(changed("32.4", "32.3"), oxum("32.3"));
    assert_eq!(changed("32.4", "032.4"), oxum("032.4"));
    assert_eq!(
        changed("Payload-Oxum", "Payload-Other"),
        [BagFault::InfoMissing {
            label: PAYLOAD_OXUM
        }]
    );
    assert_eq!(
        changed("Bagging-Date", "Bagged"),
        [BagFault::InfoMissing {
            label: BAGGING_DATE
        }]
    );
    assert_eq!(
        changed("Package-Digest", "Digest"),
        [BagFault::InfoMissing {
            label: PACKAGE_DIGEST
        }]
    );
    assert_eq!(changed("2026-03-31", "31.03.2026"), [BagFault::BaggingDate]);
    assert_eq!(
        changed("Package-Digest: sha256:", "Package-Digest: SHA256:").len(),
        1
    );
    assert_eq!(
        changed("Revision: A", "Calculation-number: A"),
        [BagFault::InfoTwice {
            label: "Calculation-number".into()
        }]
    );
    for (to, fault) in [
        ("Revision:A", LineFault::NoLabel),
        ("Revision", LineFault::NoLabel),
        ("Revi sion: A", LineFault::NoLabel),
        (" A", LineFault::Folded),
        ("\tA", LineFault::Folded),
        ("Revision: A\r", LineFault::CarriageReturn),
        ("Revision:  A", LineFault::Value),
        ("Revision: A\u{200b}", LineFault::Value),
        ("Revision: ", LineFault::Value),
    ] {
        assert_eq!(changed("Revision: A", to), [line(INFO, 2, fault)], "{to:?}");
    }
}

/// Several faults in one bag: each is reported, and what the source refused is not also called missing.
#[test]
fn prop_everything_is_found_at_once() {
    let mut files = small_bag().files;
    files.remove("data/record.md");
    files.insert("fetch.txt".into(), vec![]);
    files.insert("data/con".into(), vec![]);
    files.get_mut("data/READ-ME.txt").unwrap()[0] ^= 1;
    files.remove("data/record.pdf");
    let fault = FolderFault::Link;
    let link = Finding::Folder {
        path: "data/record.pdf".into(),
        fault,
    };
    let findings = read(
        Source {
            files,
            findings: vec![link.clone()],
        },
        &Limits::READ,
    )
    .unwrap_err();
    assert_eq!(findings[0], link);
    assert!(findings.contains(&Finding::Name {
        name: "data/con".into(),
        fault: NameFault::DeviceName
    }));
    assert!(findings.contains(&Finding::Bag(BagFault::Fetch)));
    assert!(findings.contains(&Finding::Bag(BagFault::UnlistedPayload {
        path: "data/con".into()
    })));
    let missing = |path: &str| {
        Finding::Bag(BagFault::ListedButMissing {
            path: path.into(),
            by: MANIFEST,
        })
    };
    assert!(
        findings.contains(&missing("data/record.md"))
            && !findings.contains(&missing("data/record.pdf"))
    );
    assert_eq!(findings.len(), 7, "{findings:?}");
}

/// Damage of several bytes at once, from a fixed sequence: no tag file so damaged passes or panics.
#[test]
fn prop_random_damage_of_tag_files_never_passes() {
    let files = small_bag().files;
    let mut state = 1_u64;
    let mut next = |below: usize| {
        // Constants: D. E. Knuth's MMIX linear congruential generator.
        state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as usize % below
    };
    for path in [DECLARATION, INFO, MANIFEST, TAG_MANIFEST] {
        for _ in 0..500 {
            let mut changed = files.clone();
            let bytes = changed.get_mut(path).unwrap();
            for _ in 0..=next(4) {
                let at = next(bytes.len());
                match next(3) {
                    0 => bytes[at] = next(256) as u8,
                    1 => drop(bytes.remove(at)),
                    _ => bytes.insert(at, b"\n\r %:/\0\xff"[next(8)]),
                }
            }
            if changed != files {
                assert!(read_files(changed).is_err(), "{path}");
            }
        }
    }
}
