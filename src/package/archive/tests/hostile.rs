//! Zips made to harm or to mislead: each has its reason.

use super::*;
use crate::package::finding::{ArchiveFault, Finding};

fn findings_with(zip: &[u8], limits: &Limits) -> Vec<Finding> {
    let findings = read(zip, limits).expect_err("must be refused");
    assert!(!findings.is_empty());
    for finding in &findings {
        let line = finding.to_string();
        assert!(!line.is_empty() && !line.contains('\n'), "{line}");
    }
    findings
}

fn findings(zip: &[u8]) -> Vec<Finding> {
    findings_with(zip, &Limits::READ)
}

fn archive(fault: ArchiveFault) -> Finding {
    Finding::Archive(fault)
}

fn text(name: &str) -> String {
    name.to_owned()
}

#[test]
fn hand_names_that_would_leave_the_folder_or_fool_a_system() {
    use NameFault::*;
    let long = format!("p/{}", "x".repeat(name::PATH_BYTES + 1));
    for (name, fault) in [
        ("p/../../etc/passwd", Parent),
        ("../p/a", Parent),
        ("/p/a", Absolute),
        ("p/a\\..\\b", Backslash),
        ("p\\a", Backslash),
        ("C:/p/a", DriveLetter),
        ("p/C:a", DriveLetter),
        ("p//a", Absolute),
        ("p/./a", EmptyOrDotPart),
        ("p/x\u{202e}fdp.exe", InvisibleCharacter),
        ("p/nul", DeviceName),
        ("p/data/COM1.txt", DeviceName),
        ("aux/a", DeviceName),
        ("p/a.", EndsInDotOrSpace),
        ("p/a. /b", EndsInDotOrSpace),
        ("p/a\nb", ControlCharacter),
        ("p/a\0b", ControlCharacter),
        (long.as_str(), TooLong),
    ] {
        let expected = Finding::Name {
            name: text(name),
            fault,
        };
        assert_eq!(findings(&zip_of(&[made(name)])), [expected], "{name:?}");
    }
    let latin = Made {
        name: b"p/\xe9".to_vec(),
        ..made("")
    };
    assert_eq!(
        findings(&zip_of(&[latin])),
        [Finding::NameNotUtf8 {
            name: text("p/\\xe9")
        }]
    );
}

#[test]
fn hand_names_that_clash() {
    for (first, second) in [
        ("p/A", "p/a"),
        ("p/e\u{301}", "p/é"),
        ("p/a", "p/a/b"),
        ("p/D/a", "p/d/b"),
    ] {
        let found = findings(&zip_of(&[made(first), made(second)]));
        assert!(
            matches!(found[..], [Finding::Clash { .. }]),
            "{first} {second}: {found:?}"
        );
    }
    let twice = findings(&zip_of(&[made("p/a"), made("p/a")]));
    assert_eq!(
        twice,
        [archive(ArchiveFault::Duplicate { name: text("p/a") })]
    );
    let tops = findings(&zip_of(&[made("p/a"), made("q/a")]));
    assert_eq!(
        tops,
        [archive(ArchiveFault::TwoTopFolders {
            first: text("p"),
            second: text("q")
        })]
    );
    let bare = findings(&zip_of(&[made("a")]));
    assert_eq!(
        bare,
        [archive(ArchiveFault::OutsideTopFolder { name: text("a") })]
    );
}

#[test]
fn hand_entries_that_are_not_files() {
    for (mode, kind) in [
        (0o120_777, "link"),
        (0o010_644, "pipe"),
        (0o040_755, "folder"),
        (0o020_644, "device"),
        (0o140_644, "socket"),
    ] {
        let found = findings(&zip_of(&[Made {
            mode,
            ..made("p/a")
        }]));
        assert_eq!(
            found,
            [archive(ArchiveFault::Special {
                name: text("p/a"),
                kind
            })]
        );
    }
    let folder = findings(&zip_of(&[Made {
        content: vec![],
        ..made("p/d/")
    }]));
    assert_eq!(
        folder,
        [archive(ArchiveFault::Special {
            name: text("p/d/"),
            kind: "folder"
        })]
    );
}

#[test]
fn hand_entries_that_are_not_plainly_stored() {
    let name = || text("p/a");
    for (entry, fault) in [
        (
            Made {
                flags: FLAGS | 1,
                ..made("p/a")
            },
            ArchiveFault::Encrypted { name: name() },
        ),
        (
            Made {
                flags: FLAGS | 8,
                ..made("p/a")
            },
            ArchiveFault::Flags {
                name: name(),
                flags: FLAGS | 8,
            },
        ),
        (
            Made {
                flags: 0,
                ..made("p/a")
            },
            ArchiveFault::Flags {
                name: name(),
                flags: 0,
            },
        ),
        (
            Made {
                method: 99,
                ..made("p/a")
            },
            ArchiveFault::Compressed {
                name: name(),
                method: 99,
            },
        ),
        (
            Made {
                extra: vec![1, 0, 0, 0],
                ..made("p/a")
            },
            ArchiveFault::ExtraFields { name: name() },
        ),
        (
            Made {
                crc: Some(7),
                ..made("p/a")
            },
            ArchiveFault::Checksum { name: name() },
        ),
        (
            Made {
                size_bytes: Some(2),
                ..made("p/a")
            },
            ArchiveFault::DeclaredSize { name: name() },
        ),
        (
            Made {
                local_name: Some(b"p/b".to_vec()),
                ..made("p/a")
            },
            ArchiveFault::HeadersDiffer {
                name: name(),
                field: "name",
            },
        ),
    ] {
        assert_eq!(findings(&zip_of(&[entry])), [archive(fault)]);
    }
}

/// A ratio bomb declares little stored and much expanded; nothing is ever expanded here.
#[test]
fn hand_bombs_and_lies_about_size() {
    let bomb = Made {
        method: 8,
        size_bytes: Some(4_000_000_000),
        ..made("p/a")
    };
    let expected = [
        Finding::FileTooLarge {
            path: text("p/a"),
            limit_bytes: 256 << 20,
        },
        Finding::TotalTooLarge {
            limit_bytes: 512 << 20,
        },
        archive(ArchiveFault::Compressed {
            name: text("p/a"),
            method: 8,
        }),
    ];
    let mut found = findings(&zip_of(&[bomb]));
    let mut expected = expected.to_vec();
    found.sort();
    expected.sort();
    assert_eq!(found, expected);

    let lie = Made {
        size_bytes: Some(5),
        stored_bytes: Some(5),
        ..made("p/a")
    };
    let found = findings(&zip_of(&[lie.clone(), made("p/b")]));
    assert!(
        found.contains(&archive(ArchiveFault::Overlap {
            first: text("p/a"),
            second: text("p/b")
        })),
        "{found:?}"
    );
    let found = findings(&zip_of(&[lie]));
    let second = text("central directory");
    assert!(
        found.contains(&archive(ArchiveFault::Overlap {
            first: text("p/a"),
            second
        })),
        "{found:?}"
    );
    let less = Made {
        size_bytes: Some(2),
        stored_bytes: Some(2),
        ..made("p/a")
    };
    let found = findings(&zip_of(&[less]));
    let before = text("central directory");
    assert!(
        found.contains(&archive(ArchiveFault::BytesBetween { before })),
        "{found:?}"
    );
}

#[test]
fn hand_entries_that_share_bytes() {
    let shared = Made {
        local_at: Some(0),
        ..made("p/b")
    };
    let found = findings(&zip_of(&[made("p/a"), shared]));
    assert!(
        found.contains(&archive(ArchiveFault::Overlap {
            first: text("p/a"),
            second: text("p/b")
        })),
        "{found:?}"
    );
    let far = Made {
        local_at: Some(u32::MAX - 1),
        ..made("p/a")
    };
    assert!(findings(&zip_of(&[far])).len() > 1);
}

#[test]
fn hand_bytes_that_belong_to_no_entry() {
    let zip = zip_of(&[made("p/a"), made("p/b")]);
    assert_eq!(
        findings(&[b"#!/bin/sh\n", zip.as_slice()].concat()),
        [archive(ArchiveFault::BytesBefore)]
    );
    assert_eq!(
        findings(&[zip.as_slice(), b"x"].concat()),
        [archive(ArchiveFault::BytesAfter)]
    );
    let mut commented = zip.clone();
    let length_at = commented.len() - 2;
    commented[length_at] = 5;
    commented.extend(b"hello");
    assert_eq!(findings(&commented), [archive(ArchiveFault::BytesAfter)]);

    // Bytes before, with all offsets moved to match.
    let skipped = [
        made("p/a"),
        Made {
            local_at: Some(35),
            ..made("p/b")
        },
    ];
    let mut moved = zip_of(&skipped);
    let entry_bytes = LOCAL_BYTES + 3 + 3;
    assert_eq!(&moved[entry_bytes..entry_bytes + 4], b"PK\x03\x04");
    moved[entry_bytes - 1] = b'x';
    assert!(!findings(&moved).is_empty());
}

#[test]
fn hand_counts_and_limits() {
    let zip = zip_of(&[made("p/a"), made("p/b")]);
    let limits = Limits {
        n_entries: 1,
        ..Limits::READ
    };
    assert_eq!(
        findings_with(&zip, &limits),
        [Finding::TooManyEntries { limit: 1 }]
    );
    let limits = Limits {
        total_bytes: 5,
        ..Limits::READ
    };
    assert_eq!(
        findings_with(&zip, &limits),
        [Finding::TotalTooLarge { limit_bytes: 5 }]
    );
    let limits = Limits {
        file_bytes: 2,
        ..Limits::READ
    };
    assert_eq!(findings_with(&zip, &limits).len(), 2);

    let end = zip.len() - END_BYTES;
    let with_counts = |n: u16| {
        let mut changed = zip.clone();
        changed[end + 8..end + 10].copy_from_slice(&n.to_le_bytes());
        changed[end + 10..end + 12].copy_from_slice(&n.to_le_bytes());
        findings(&changed)
    };
    assert!(with_counts(1).contains(&archive(ArchiveFault::CountDiffers)));
    assert!(with_counts(3).contains(&archive(ArchiveFault::CountDiffers)));
    assert_eq!(with_counts(0), [archive(ArchiveFault::Empty)]);
    assert_eq!(with_counts(u16::MAX), [archive(ArchiveFault::Oversize)]);
    let mut split = zip.clone();
    split[end + 4] = 1;
    assert_eq!(findings(&split), [archive(ArchiveFault::SeveralDisks)]);
    assert_eq!(findings(b""), [archive(ArchiveFault::NotAZip)]);
    assert_eq!(findings(&[0; 1000]), [archive(ArchiveFault::NotAZip)]);
}

/// Good for every unpacker, yet not what would be written: other order, date or mode.
#[test]
fn hand_a_zip_of_another_hand_is_refused_by_the_strong_rule() {
    let order = findings(&zip_of(&[made("p/b"), made("p/a")]));
    assert!(
        matches!(
            order[..],
            [Finding::Archive(ArchiveFault::NotCanonical { offset: 32 })]
        ),
        "{order:?}"
    );
    let mode = findings(&zip_of(&[Made {
        mode: 0o100_755,
        ..made("p/a")
    }]));
    assert!(
        matches!(
            mode[..],
            [Finding::Archive(ArchiveFault::NotCanonical { .. })]
        ),
        "{mode:?}"
    );
}

#[test]
fn prop_several_faults_are_found_at_once() {
    let entries = [
        Made {
            mode: 0o120_777,
            ..made("p/link")
        },
        Made {
            flags: FLAGS | 1,
            ..made("p/secret")
        },
        made("p/../x"),
        Made {
            crc: Some(1),
            ..made("p/y")
        },
    ];
    assert_eq!(findings(&zip_of(&entries)).len(), 4);
}

#[test]
fn prop_every_truncation_is_found_and_named() {
    let zip = write("p", &small_files()).unwrap();
    for length in 0..zip.len() {
        let expected = if length < 4 {
            ArchiveFault::NotAZip
        } else {
            ArchiveFault::Truncated
        };
        assert_eq!(
            findings(&zip[..length]),
            [archive(expected)],
            "{length} bytes"
        );
    }
}
