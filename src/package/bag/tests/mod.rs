mod hostile;

use super::*;
use crate::package::finding::Finding;
use crate::package::{Limits, Source};

fn small_payload() -> Payload {
    BTreeMap::from([
        ("READ-ME.txt".to_owned(), b"read me\n".to_vec()),
        ("inputs/tank.toml".to_owned(), b"format = 1\n".to_vec()),
        ("record.pdf".to_owned(), b"%PDF".to_vec()),
        ("record.md".to_owned(), b"# Record\n".to_vec()),
    ])
}

fn small_info() -> BagInfo {
    BagInfo {
        fields: vec![
            ("Calculation-Number".into(), "PS-101".into()),
            ("Revision".into(), "A".into()),
        ],
        bagging_date: "2026-03-31".into(),
    }
}

fn small_bag() -> Bag {
    build(small_payload(), &small_info(), &Limits::WRITTEN).unwrap()
}

fn read_files(files: BTreeMap<String, Vec<u8>>) -> Result<Bag, Vec<Finding>> {
    read(
        Source {
            files,
            findings: Vec::new(),
        },
        &Limits::READ,
    )
}

/// RFC 8493: section 2.1.1 (declaration), 2.1.3 (manifest), 2.2.1 (tag manifest), 2.2.2 (Payload-Oxum).
#[test]
fn val_a_bag_has_the_files_of_the_standard() {
    let bag = small_bag();
    let text = |path: &str| String::from_utf8(bag.files[path].clone()).unwrap();
    assert_eq!(
        text("bagit.txt"),
        "BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n"
    );
    let digest = |bytes: &[u8]| Digest::of(bytes);
    let manifest = format!(
        "{}  data/READ-ME.txt\n{}  data/inputs/tank.toml\n{}  data/record.md\n{}  data/record.pdf\n",
        digest(b"read me\n"),
        digest(b"format = 1\n"),
        digest(b"# Record\n"),
        digest(b"%PDF"),
    );
    assert_eq!(text("manifest-sha256.txt"), manifest);
    let package_digest = Digest::of(manifest.as_bytes());
    let info = format!(
        "Calculation-Number: PS-101\nRevision: A\nBagging-Date: 2026-03-31\nPayload-Oxum: 32.4\nPackage-Digest: sha256:{package_digest}\n"
    );
    assert_eq!(text("bag-info.txt"), info);
    let tags = format!(
        "{}  bag-info.txt\n{}  bagit.txt\n{}  manifest-sha256.txt\n",
        digest(info.as_bytes()),
        digest(DECLARATION_TEXT.as_bytes()),
        package_digest,
    );
    assert_eq!(text("tagmanifest-sha256.txt"), tags);
    assert_eq!(bag.package_digest(), package_digest);
    assert_eq!(bag.files.len(), 8);
}

#[test]
fn hand_the_fingerprint_covers_all_but_the_records() {
    let lines = format!(
        "{}  data/READ-ME.txt\n{}  data/inputs/tank.toml\n",
        Digest::of(b"read me\n"),
        Digest::of(b"format = 1\n")
    );
    let expected = Digest::of(lines.as_bytes());
    let mut payload = small_payload();
    assert_eq!(content_fingerprint(&payload), expected);
    assert_eq!(small_bag().content_fingerprint(), expected);
    payload.remove("record.md");
    payload.insert("record.pdf".into(), b"another".to_vec());
    assert_eq!(content_fingerprint(&payload), expected);
    payload.insert("inputs/record.pdf".into(), b"an input".to_vec());
    assert_ne!(content_fingerprint(&payload), expected);
}

#[test]
fn prop_what_is_built_is_read_back() {
    let bag = small_bag();
    assert_eq!(read_files(bag.files.clone()), Ok(bag.clone()));
    assert_eq!(
        bag.payload()
            .map(|(path, bytes)| (path.to_owned(), bytes.to_vec()))
            .collect::<Payload>(),
        small_payload()
    );

    let mut files = bag.files.clone();
    files.insert("signatures/checker.p7s".into(), b"signature".to_vec());
    let signed = read_files(files).unwrap();
    assert_eq!(
        signed.signatures().collect::<Vec<_>>(),
        [("checker.p7s", b"signature".as_slice())]
    );
    assert_eq!(signed.content_fingerprint(), bag.content_fingerprint());
}

#[test]
fn hand_all_faults_of_a_build_are_reported() {
    let payload = BTreeMap::from([
        ("a\nb".to_owned(), vec![]),
        ("c".to_owned(), vec![]),
        ("C".to_owned(), vec![]),
    ]);
    let field = |label: &str, value: &str| (label.to_owned(), value.to_owned());
    let info = BagInfo {
        fields: vec![
            field("Title", "one\ntwo"),
            field("Title", "Tank"),
            field("payload-oxum", "1.1"),
            field("A: b", "c"),
            field("Empty", ""),
            field("Padded", " x"),
            field("Turned", "a\u{202e}b"),
        ],
        bagging_date: "2026-02-30".into(),
    };
    let label = |label: &str| label.to_owned();
    let expected = vec![
        BuildFault::Name {
            path: "a\nb".into(),
            fault: NameFault::ControlCharacter,
        },
        BuildFault::Clash {
            first: "C".into(),
            second: "c".into(),
        },
        BuildFault::Value {
            label: label("Title"),
        },
        BuildFault::LabelTwice {
            label: label("Title"),
        },
        BuildFault::LabelTwice {
            label: label("payload-oxum"),
        },
        BuildFault::Label {
            label: label("A: b"),
        },
        BuildFault::Value {
            label: label("Empty"),
        },
        BuildFault::Value {
            label: label("Padded"),
        },
        BuildFault::Value {
            label: label("Turned"),
        },
        BuildFault::Date {
            text: "2026-02-30".into(),
        },
    ];
    assert_eq!(build(payload, &info, &Limits::WRITTEN), Err(expected));
    assert_eq!(
        build(Payload::new(), &small_info(), &Limits::WRITTEN),
        Err(vec![BuildFault::NoPayload])
    );
}

#[test]
fn hand_limits_of_a_build() {
    // Four files, the folder of one of them, `data` and four tag files; 32 bytes, at most 11 a file.
    let exact = Limits {
        n_entries: 10,
        file_bytes: 11,
        total_bytes: 32,
    };
    let faults = |limits: &Limits| build(small_payload(), &small_info(), limits).err();
    assert_eq!(faults(&exact), None);
    let few = Limits {
        n_entries: 9,
        ..exact
    };
    assert_eq!(
        faults(&few),
        Some(vec![BuildFault::TooManyEntries { limit: 9 }])
    );
    let path = "inputs/tank.toml".to_owned();
    let short = Limits {
        file_bytes: 10,
        ..exact
    };
    assert_eq!(
        faults(&short),
        Some(vec![BuildFault::FileTooLarge {
            path,
            limit_bytes: 10
        }])
    );
    let small = Limits {
        total_bytes: 31,
        ..exact
    };
    assert_eq!(
        faults(&small),
        Some(vec![BuildFault::TotalTooLarge { limit_bytes: 31 }])
    );
}
