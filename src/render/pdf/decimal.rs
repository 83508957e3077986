//! Numbers in columns: split at the decimal sign so that the signs stand below each other.

use super::layout::Layout;
use super::strip::{Drawn, Glyphs};
use super::text::Look;
use crate::record::block::{Inline, Text};
use crate::render::face::{FaceId, Faces, Glyph};

/// A number split at its decimal sign.
#[derive(Clone)]
pub struct Decimal {
    runs: Vec<(FaceId, Vec<Glyph>)>,
    pub whole_width: f32,
    pub fraction_width: f32,
    pub above: f32,
    pub below: f32,
}

impl Decimal {
    /// Reads a cell as a number; nothing if it is anything else.
    pub fn of(cell: &Text, look: &Look, layout: &Layout<'_>) -> Option<Decimal> {
        let text = match cell.as_slice() {
            [Inline::Text(text) | Inline::Strong(text)] => text.trim(),
            _ => return None,
        };
        let sign = layout.style.text.decimal_sign;
        let split = split_at_sign(text, sign)?;
        let face = if look.strong || matches!(cell.as_slice(), [Inline::Strong(_)]) {
            FaceId::SansStrong
        } else {
            FaceId::Sans
        };
        let (whole, fraction) = text.split_at(split);
        let width = |part: &str, faces: &Faces| faces.width(face, part, look.size, true);
        let mut runs = Vec::new();
        for part in [whole, fraction] {
            runs.extend(
                layout
                    .faces
                    .shape(face, part, true)
                    .iter()
                    .map(|run| (run.face, run.glyphs.clone())),
            );
        }
        let below = (look.leading - look.size * 0.66) / 2.0 + look.size * 0.02;
        Some(Decimal {
            runs,
            whole_width: width(whole, layout.faces),
            fraction_width: width(fraction, layout.faces),
            above: look.leading - below,
            below,
        })
    }

    /// Marks of the number with its decimal sign at `sign`.
    pub fn marks(&self, sign: f32, baseline: f32, look: &Look) -> Vec<Drawn> {
        let mut x = sign - self.whole_width;
        let mut marks: Vec<Drawn> = Vec::new();
        for (face, glyphs) in &self.runs {
            let width = glyphs.iter().map(|glyph| glyph.advance).sum::<f32>() * look.size / 1000.0;
            match marks.last_mut() {
                Some(Drawn::Glyphs(run)) if run.face == *face => {
                    run.glyphs.extend(glyphs.iter().cloned())
                }
                _ => marks.push(Drawn::Glyphs(Glyphs {
                    face: *face,
                    size: look.size,
                    x,
                    baseline,
                    colour: look.colour,
                    glyphs: glyphs.clone(),
                    stretch: 0.0,
                    upwards: false,
                })),
            }
            x += width;
        }
        marks
    }
}

/// Byte offset of the decimal sign, or of the end of the whole part; nothing if the text is not a number.
fn split_at_sign(text: &str, sign: char) -> Option<usize> {
    let body = text.trim_start_matches([
        '−', '-', '+', '±', '<', '>', '≤', '≥', '≈', '~', ' ', '\u{2009}', '\u{202f}',
    ]);
    let start = text.len() - body.len();
    if !body.starts_with(|c: char| c.is_ascii_digit()) {
        return None;
    }
    let grouping = |c: char| matches!(c, '\u{2009}' | '\u{202f}' | '\u{a0}');
    let mut end = start;
    let mut characters = body.char_indices().peekable();
    while let Some((at, character)) = characters.next() {
        let before_digit = characters
            .peek()
            .is_some_and(|(_, next)| next.is_ascii_digit());
        if character.is_ascii_digit() || grouping(character) && before_digit {
            end = start + at + character.len_utf8();
        } else {
            break;
        }
    }
    // What follows may be a fraction, an exponent, an uncertainty or a unit; a second word of letters is prose.
    let rest = &text[end..];
    let letters = rest.chars().filter(|c| c.is_alphabetic()).count();
    let plain = rest.is_empty()
        || rest.starts_with(sign)
        || rest.starts_with([
            'e', 'E', '×', ' ', '\u{2009}', '\u{202f}', '\u{a0}', '±', '%', '(',
        ]);
    (plain && letters <= 6).then_some(end)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn hand_numbers_split_at_their_decimal_sign() {
        assert_eq!(split_at_sign("12.5", '.'), Some(2));
        assert_eq!(
            split_at_sign("−1\u{2009}234.5 × 10⁻³", '.'),
            Some("−1\u{2009}234".len())
        );
        assert_eq!(split_at_sign("2450", '.'), Some(4));
        assert_eq!(split_at_sign("3,5", ','), Some(1));
        assert_eq!(split_at_sign("≤ 0.25", '.'), Some("≤ 0".len()));
        assert_eq!(split_at_sign("1.2e-9", '.'), Some(1));
    }

    #[test]
    fn hand_words_and_dates_are_not_numbers() {
        assert_eq!(split_at_sign("none stated", '.'), None);
        assert_eq!(split_at_sign("2026-03-14", '.'), None);
        assert_eq!(split_at_sign("4 pumps in parallel", '.'), None);
        assert_eq!(split_at_sign("–", '.'), None);
    }
}
