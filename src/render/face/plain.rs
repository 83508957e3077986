//! The plain character behind each glyph of the mathematics face, for search and for copying.

use std::collections::BTreeMap;

use skrifa::MetadataProvider;

/// Maps every glyph to plain text: by the character map, or by the base of the glyph's name (`x.ssty` is an x).
pub fn glyph_texts(program: &[u8]) -> Option<BTreeMap<u16, String>> {
    let reader = skrifa::FontRef::new(program).ok()?;
    let mut characters: BTreeMap<u16, char> = BTreeMap::new();
    for (code, glyph) in reader.charmap().mappings() {
        let character = char::from_u32(code)?;
        let kept = characters.entry(glyph.to_u32() as u16).or_insert(character);
        // One glyph may serve two characters (Δ, ∆): keep the one that people type and search for.
        if preference(character) < preference(*kept) {
            *kept = character;
        }
    }
    let names = reader.glyph_names();
    let name = |glyph: u16| {
        names
            .get(skrifa::GlyphId::from(glyph))
            .map(|n| n.to_string())
            .unwrap_or_default()
    };
    let by_name: BTreeMap<String, char> = characters
        .iter()
        .map(|(glyph, c)| (name(*glyph), *c))
        .collect();
    for glyph in 0..names.num_glyphs().min(u32::from(u16::MAX)) as u16 {
        if characters.contains_key(&glyph) {
            continue;
        }
        let full = name(glyph);
        let Some((base, _)) = full.split_once('.') else {
            continue;
        };
        let alias = if base == "minus" { "uni2212" } else { base };
        if let Some(character) = by_name.get(base).or_else(|| by_name.get(alias)) {
            characters.insert(glyph, *character);
        }
    }
    Some(
        characters
            .into_iter()
            .map(|(glyph, c)| (glyph, plain_letter(c).to_string()))
            .collect(),
    )
}

fn preference(character: char) -> u32 {
    match character {
        'Ω' | 'Δ' | 'μ' => 0,
        c => c as u32,
    }
}

/// Turns letters of the Mathematical Alphanumeric Symbols block into plain letters, so that a search finds "x".
///
/// Source: The Unicode Standard, code chart 1D400 to 1D7FF.
fn plain_letter(character: char) -> char {
    let code = character as u32;
    let latin = |offset: u32| {
        let place = offset % 52;
        char::from_u32(if place < 26 {
            0x41 + place
        } else {
            0x61 + place - 26
        })
        .unwrap_or(character)
    };
    match code {
        0x1D400..=0x1D6A3 => latin(code - 0x1D400),
        0x1D6A8..=0x1D7C9 => match (code - 0x1D6A8) % 58 {
            upper @ 0..=24 => char::from_u32(0x391 + upper).unwrap_or(character),
            25 => '∇',
            lower @ 26..=50 => char::from_u32(0x3B1 + lower - 26).unwrap_or(character),
            51 => '∂',
            52 => 'ϵ',
            53 => 'ϑ',
            54 => 'ϰ',
            55 => 'ϕ',
            56 => 'ϱ',
            _ => 'ϖ',
        },
        0x1D7CE..=0x1D7FF => char::from_u32(0x30 + (code - 0x1D7CE) % 10).unwrap_or(character),
        0x210E => 'h',
        _ => character,
    }
}
