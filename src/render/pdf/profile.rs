//! An ICC profile of sRGB for the output intent, made from the standard's own numbers.
//!
//! Sources: IEC 61966-2-1 (transfer curve), ICC.1:2001-04 (file format, version 2), primaries adapted to D50.

use crate::float;

/// A matrix/curve display profile, version 2.1.
pub fn srgb() -> Vec<u8> {
    let name = b"sRGB IEC61966-2.1 compatible\0";
    let mut description = tagged(b"desc");
    description.extend((name.len() as u32).to_be_bytes());
    description.extend(name);
    description.extend([0; 4 + 4 + 2 + 1 + 67]);
    let mut licence = tagged(b"text");
    licence.extend(b"No copyright, use freely\0");
    let mut curve = tagged(b"curv");
    curve.extend((CURVE as u32).to_be_bytes());
    curve.extend((0..CURVE).flat_map(|i| linear(i as f64 / (CURVE - 1) as f64).to_be_bytes()));
    let parts = [
        description,
        licence,
        xyz([0.9505, 1.0, 1.0891]),
        xyz([0.436_074_7, 0.222_504_5, 0.013_932_2]),
        xyz([0.385_064_9, 0.716_878_6, 0.097_104_5]),
        xyz([0.143_080_4, 0.060_616_9, 0.714_173_3]),
        curve,
    ];
    let tags: [(&[u8; 4], usize); 9] = [
        (b"desc", 0),
        (b"cprt", 1),
        (b"wtpt", 2),
        (b"rXYZ", 3),
        (b"gXYZ", 4),
        (b"bXYZ", 5),
        (b"rTRC", 6),
        (b"gTRC", 6),
        (b"bTRC", 6),
    ];
    let table = 4 + 12 * tags.len();
    let mut places = Vec::new();
    let mut body = Vec::new();
    for part in &parts {
        places.push((128 + table + body.len(), part.len()));
        body.extend(part);
        body.resize(body.len().next_multiple_of(4), 0);
    }
    let mut file = header((128 + table + body.len()) as u32);
    file.extend((tags.len() as u32).to_be_bytes());
    for (name, part) in tags {
        file.extend(name);
        file.extend((places[part].0 as u32).to_be_bytes());
        file.extend((places[part].1 as u32).to_be_bytes());
    }
    file.extend(body);
    file
}

const CURVE: usize = 512;

/// Linear light of an sRGB value, both from 0 to 1, as a 16-bit number.
fn linear(value: f64) -> u16 {
    let light = if value <= 0.040_45 {
        value / 12.92
    } else {
        float::pow((value + 0.055) / 1.055, 2.4)
    };
    (light * 65535.0).round() as u16
}

fn tagged(kind: &[u8; 4]) -> Vec<u8> {
    let mut part = kind.to_vec();
    part.extend([0; 4]);
    part
}

fn xyz(values: [f64; 3]) -> Vec<u8> {
    let mut part = tagged(b"XYZ ");
    part.extend(values.iter().flat_map(|value| fixed(*value)));
    part
}

fn fixed(value: f64) -> [u8; 4] {
    ((value * 65536.0).round() as i32).to_be_bytes()
}

fn header(length: u32) -> Vec<u8> {
    let mut header = vec![0; 128];
    let mut put = |at: usize, bytes: &[u8]| header[at..at + bytes.len()].copy_from_slice(bytes);
    put(0, &length.to_be_bytes());
    put(8, &[2, 0x10, 0, 0]);
    put(12, b"mntrRGB XYZ ");
    // A date is required and means nothing here: the first day of 2026.
    put(24, &[0x07, 0xEA, 0, 1, 0, 1, 0, 0, 0, 0, 0, 0]);
    put(36, b"acsp");
    put(68, &fixed(0.9642));
    put(72, &fixed(1.0));
    put(76, &fixed(0.8249));
    header
}
