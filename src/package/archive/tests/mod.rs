mod hostile;

use super::*;
use crate::package::Limits;

fn small_files() -> BTreeMap<String, Vec<u8>> {
    BTreeMap::from([
        ("b.txt".to_owned(), b"bee".to_vec()),
        ("data/Ä.csv".to_owned(), b"a,b\n".to_vec()),
    ])
}

/// One entry of a hand-made zip; the defaults are those of a good one.
#[derive(Clone)]
struct Made {
    name: Vec<u8>,
    local_name: Option<Vec<u8>>,
    content: Vec<u8>,
    flags: u16,
    method: u16,
    size_bytes: Option<u32>,
    stored_bytes: Option<u32>,
    crc: Option<u32>,
    mode: u32,
    extra: Vec<u8>,
    local_at: Option<u32>,
}

fn made(name: &str) -> Made {
    Made {
        name: name.as_bytes().to_vec(),
        local_name: None,
        content: b"abc".to_vec(),
        flags: FLAGS,
        method: STORED,
        size_bytes: None,
        stored_bytes: None,
        crc: None,
        mode: 0o100_644,
        extra: Vec::new(),
        local_at: None,
    }
}

/// Writes a zip as told, independently of the writer under test.
fn zip_of(entries: &[Made]) -> Vec<u8> {
    let mut zip = Vec::new();
    let mut central = Vec::new();
    for entry in entries {
        let at = zip.len() as u32;
        let length = entry.content.len() as u32;
        let shared = |name: &[u8]| {
            let mut fields = Vec::new();
            for field in [20, entry.flags, entry.method, 0, 33] {
                fields.extend(field.to_le_bytes());
            }
            fields.extend(
                entry
                    .crc
                    .unwrap_or_else(|| crc32::of(&entry.content))
                    .to_le_bytes(),
            );
            fields.extend(entry.stored_bytes.unwrap_or(length).to_le_bytes());
            fields.extend(entry.size_bytes.unwrap_or(length).to_le_bytes());
            fields.extend((name.len() as u16).to_le_bytes());
            fields
        };
        let local_name = entry.local_name.as_ref().unwrap_or(&entry.name);
        zip.extend(b"PK\x03\x04");
        zip.extend(shared(local_name));
        zip.extend([0, 0]);
        zip.extend(local_name);
        zip.extend(&entry.content);

        central.extend(b"PK\x01\x02\x14\x03");
        central.extend(shared(&entry.name));
        central.extend((entry.extra.len() as u16).to_le_bytes());
        central.extend([0; 6]);
        central.extend((entry.mode << 16).to_le_bytes());
        central.extend(entry.local_at.unwrap_or(at).to_le_bytes());
        central.extend(&entry.name);
        central.extend(&entry.extra);
    }
    let central_at = zip.len() as u32;
    zip.extend(&central);
    zip.extend(b"PK\x05\x06\0\0\0\0");
    zip.extend((entries.len() as u16).to_le_bytes());
    zip.extend((entries.len() as u16).to_le_bytes());
    zip.extend((central.len() as u32).to_le_bytes());
    zip.extend(central_at.to_le_bytes());
    zip.extend([0, 0]);
    zip
}

#[test]
fn prop_what_is_written_is_read_back_and_written_alike() {
    let zip = write("PS-101_A", &small_files()).unwrap();
    let source = read(&zip, &Limits::READ).unwrap();
    assert_eq!((source.files, source.findings), (small_files(), vec![]));
    assert_eq!(write("PS-101_A", &small_files()).unwrap(), zip);
    assert_eq!(zip.len() as u64, written_bytes("PS-101_A", &small_files()));
    let by_hand = [
        Made {
            content: b"bee".to_vec(),
            ..made("PS-101_A/b.txt")
        },
        Made {
            content: b"a,b\n".to_vec(),
            ..made("PS-101_A/data/Ä.csv")
        },
    ];
    assert_eq!(zip_of(&by_hand), zip);
}

#[test]
fn prop_every_flipped_bit_is_found() {
    let zip = write("p", &small_files()).unwrap();
    for at in 0..zip.len() {
        for bit in 0..8 {
            let mut changed = zip.clone();
            changed[at] ^= 1 << bit;
            assert!(
                read(&changed, &Limits::READ).is_err(),
                "byte {at}, bit {bit}"
            );
        }
    }
}

#[test]
fn hand_what_cannot_be_written() {
    let file = |path: &str| BTreeMap::from([(path.to_owned(), vec![])]);
    for top_folder in ["", "a/b", "..", "con", "a\\b"] {
        assert!(
            matches!(write(top_folder, &file("x")), Err(WriteFault::Name { .. })),
            "{top_folder}"
        );
    }
    assert!(matches!(
        write("p", &file("../x")),
        Err(WriteFault::Name { .. })
    ));
    let clash = BTreeMap::from([("a".to_owned(), vec![]), ("A".to_owned(), vec![])]);
    assert!(matches!(write("p", &clash), Err(WriteFault::Clash { .. })));
    let many = (0..u32::from(u16::MAX))
        .map(|k| (k.to_string(), vec![]))
        .collect();
    assert_eq!(write("p", &many), Err(WriteFault::TooManyFiles));
}

/// Damage of several bytes at once, from a fixed sequence, with the extremes that break arithmetic.
#[test]
fn prop_random_damage_never_passes_nor_panics() {
    let zip = write("p", &small_files()).unwrap();
    let mut state = 1_u64;
    let mut next = |below: usize| {
        // Constants: D. E. Knuth's MMIX linear congruential generator.
        state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) as usize % below
    };
    for _ in 0..20_000 {
        let mut changed = zip.clone();
        for _ in 0..=next(4) {
            let at = next(changed.len());
            let byte = [0, 1, 0x7f, 0x80, 0xff, next(256) as u8][next(6)];
            let length = [1, 2, 4][next(3)];
            changed[at..]
                .iter_mut()
                .take(length)
                .for_each(|place| *place = byte);
        }
        if changed != zip {
            assert!(read(&changed, &Limits::READ).is_err());
        }
    }
}
