//! From inline pieces to words: where text may break, which face each part has.

use std::rc::Rc;

use unicode_linebreak::{BreakOpportunity, linebreaks};

use super::formula;
use super::text::{Bit, Family, Ink, Look, Source, Word};
use crate::record::block::Inline;
use crate::render::RenderError;
use crate::render::face::{FaceId, Faces, GlyphRun, printable};
use crate::render::math::to_plain;
use crate::render::style::Rgb;

/// Collects the pieces of one stretch of text between forced breaks.
pub struct Builder<'a> {
    look: &'a Look,
    faces: &'a Faces,
    /// All text of the part, with one letter for each formula, so that break rules see the whole.
    whole: String,
    spans: Vec<Span>,
}

struct Span {
    start: usize,
    end: usize,
    kind: Kind,
}

enum Kind {
    Letters {
        face: FaceId,
        size: f32,
        colour: Rgb,
        source: Source,
    },
    Formula(Bit),
}

impl<'a> Builder<'a> {
    pub fn new(look: &'a Look, faces: &'a Faces) -> Builder<'a> {
        Builder {
            look,
            faces,
            whole: String::new(),
            spans: Vec::new(),
        }
    }

    /// Adds the words of the pieces.
    ///
    /// # Errors
    /// A formula that cannot be laid out.
    pub fn part(mut self, part: &[Inline], words: &mut Vec<Word>) -> Result<(), RenderError> {
        for piece in part {
            self.inline(piece)?;
        }
        if self.whole.trim().is_empty() {
            return Ok(());
        }
        let mut breaks: Vec<usize> = linebreaks(&self.whole)
            .filter(|(at, kind)| *kind != BreakOpportunity::Mandatory && self.parts_well(*at))
            .map(|(at, _)| at)
            .collect();
        breaks.extend(self.code_breaks());
        breaks.push(self.whole.len());
        breaks.sort_unstable();
        breaks.dedup();
        let mut start = 0;
        for end in breaks {
            let trimmed = self.whole[start..end].trim_end_matches(' ');
            if !trimmed.is_empty() {
                let space = start + trimmed.len() < end;
                self.word(start, start + trimmed.len(), space, words);
            }
            start = end;
        }
        Ok(())
    }

    /// Whether a break here leaves something on both sides: "L/s" and "T-14" stay whole.
    fn parts_well(&self, at: usize) -> bool {
        let (before, after) = self.whole.split_at(at);
        if before.ends_with(' ') {
            return true;
        }
        let solid = |c: &char| !c.is_whitespace();
        before.chars().rev().take_while(solid).count() > 3
            && after.chars().take_while(solid).count() > 2
    }

    fn inline(&mut self, piece: &Inline) -> Result<(), RenderError> {
        let Look {
            family,
            strong,
            size,
            colour,
            accent,
            ..
        } = *self.look;
        let base = match (family, strong) {
            (Family::Serif, false) => FaceId::Serif,
            (Family::Serif, true) => FaceId::SerifBold,
            (Family::Sans, false) => FaceId::Sans,
            (Family::Sans, true) => FaceId::SansStrong,
        };
        let italic = if family == Family::Serif {
            FaceId::SerifItalic
        } else {
            FaceId::SansItalic
        };
        let bold = if family == Family::Serif {
            FaceId::SerifBold
        } else {
            FaceId::SansStrong
        };
        match piece {
            Inline::Text(text) => self.letters(text, base, size, colour, Source::Plain),
            Inline::Emphasis(text) => self.letters(text, italic, size, colour, Source::Plain),
            Inline::Strong(text) => self.letters(text, bold, size, colour, Source::Plain),
            // The mono face is wide and tall: a little smaller it matches the text around it.
            Inline::Code(text) => {
                self.letters(text, FaceId::Mono, size * 0.86, colour, Source::Plain)
            }
            Inline::Reference { text, anchor } => self.letters(
                text,
                base,
                size,
                accent,
                Source::Link(anchor.as_str().into()),
            ),
            Inline::Break => {}
            Inline::Math(math) => {
                let alternative: Rc<str> = to_plain(math).into();
                for part in formula::split_inline(math) {
                    let layout = Rc::new(formula::lay_out(&part, size, false, self.faces)?);
                    let start = self.whole.len();
                    self.whole.push('x');
                    let bit = Bit {
                        width: layout.width,
                        ink: Ink::Formula { layout, colour },
                        source: Source::Formula(Rc::clone(&alternative)),
                    };
                    self.spans.push(Span {
                        start,
                        end: start + 1,
                        kind: Kind::Formula(bit),
                    });
                }
            }
        }
        Ok(())
    }

    fn letters(&mut self, text: &str, face: FaceId, size: f32, colour: Rgb, source: Source) {
        let start = self.whole.len();
        self.whole.push_str(&printable(text));
        let kind = Kind::Letters {
            face,
            size,
            colour,
            source,
        };
        self.spans.push(Span {
            start,
            end: self.whole.len(),
            kind,
        });
    }

    /// Paths and digests may break where a reader would pause, and long runs of other characters every so often.
    /// Parts of a formula may break from each other.
    fn code_breaks(&self) -> Vec<usize> {
        const LONG: usize = 20;
        const GROUP: usize = 8;
        let mut breaks = Vec::new();
        for pair in self.spans.windows(2) {
            if matches!((&pair[0].kind, &pair[1].kind), (Kind::Formula(a), Kind::Formula(b)) if a.source == b.source)
            {
                breaks.push(pair[1].start);
            }
        }
        for span in self.spans.iter().filter(|span| {
            matches!(
                span.kind,
                Kind::Letters {
                    face: FaceId::Mono,
                    ..
                }
            )
        }) {
            let mut offset = span.start;
            for token in self.whole[span.start..span.end].split_inclusive(' ') {
                let mut run = 0;
                if token.chars().count() > LONG {
                    for (i, character) in token.char_indices() {
                        if run == GROUP && i + GROUP / 2 < token.len() {
                            breaks.push(offset + i);
                            run = 0;
                        }
                        run += 1;
                        if "/_-.:=&?,;".contains(character) && i + 1 < token.len() {
                            breaks.push(offset + i + character.len_utf8());
                            run = 0;
                        }
                    }
                }
                offset += token.len();
            }
        }
        breaks
    }

    fn word(&self, start: usize, end: usize, space: bool, words: &mut Vec<Word>) {
        let mut current = Word::default();
        let mut last_letters = None;
        for span in self
            .spans
            .iter()
            .filter(|span| span.start < end && span.end > start)
        {
            match &span.kind {
                Kind::Formula(bit) => current.push(bit.clone()),
                Kind::Letters {
                    face,
                    size,
                    colour,
                    source,
                } => {
                    last_letters = Some((*face, *size));
                    let text = &self.whole[span.start.max(start)..span.end.min(end)];
                    let whole_word = span.start <= start && span.end >= end;
                    let cuts = if whole_word && self.look.hyphenate && *face != FaceId::Mono {
                        syllables(text)
                    } else {
                        Vec::new()
                    };
                    let mut from = 0;
                    for cut in cuts {
                        self.push_letters(
                            &text[from..cut],
                            *face,
                            *size,
                            *colour,
                            source,
                            &mut current,
                        );
                        let hyphen = self.bits("-", *face, *size, *colour, source).pop();
                        let part = std::mem::take(&mut current);
                        words.push(Word { hyphen, ..part });
                        from = cut;
                    }
                    self.push_letters(&text[from..], *face, *size, *colour, source, &mut current);
                }
            }
        }
        if space {
            let (face, size) = self
                .space_look(end)
                .or(last_letters)
                .unwrap_or((FaceId::Serif, self.look.size));
            current.space = self.faces.width(face, " ", size, false);
            // A word in the mono face needs a clear space after it.
            if matches!(last_letters, Some((FaceId::Mono, _))) && face != FaceId::Mono {
                current.space = current.space.max(0.3 * size);
            }
        }
        words.push(current);
    }

    /// Face and size of the text in which a space stands.
    fn space_look(&self, at: usize) -> Option<(FaceId, f32)> {
        let span = self
            .spans
            .iter()
            .find(|span| span.start <= at && at < span.end)?;
        match span.kind {
            Kind::Letters { face, size, .. } => Some((face, size)),
            Kind::Formula(_) => None,
        }
    }

    fn push_letters(
        &self,
        text: &str,
        face: FaceId,
        size: f32,
        colour: Rgb,
        source: &Source,
        word: &mut Word,
    ) {
        for bit in self.bits(text, face, size, colour, source) {
            word.push(bit);
        }
    }

    fn bits(&self, text: &str, face: FaceId, size: f32, colour: Rgb, source: &Source) -> Vec<Bit> {
        let shaped = self
            .faces
            .shape(face, text, self.look.family == Family::Sans);
        let bit = |run: &GlyphRun| Bit {
            width: run.glyphs.iter().map(|glyph| glyph.advance).sum::<f32>() * size / 1000.0,
            ink: Ink::Glyphs {
                face: run.face,
                size,
                colour,
                glyphs: run.glyphs.clone(),
            },
            source: source.clone(),
        };
        shaped.iter().map(bit).collect()
    }
}

/// Where a word may be divided, as byte offsets: plain English words of seven letters or more, three letters a side.
fn syllables(word: &str) -> Vec<usize> {
    let core = word.trim_end_matches(|c: char| !c.is_alphabetic());
    if core.len() < 7
        || !core.bytes().all(|b| b.is_ascii_alphabetic())
        || core.bytes().skip(1).any(|b| b.is_ascii_uppercase())
    {
        return Vec::new();
    }
    let mut offset = 0;
    let mut cuts = Vec::new();
    for syllable in hypher::hyphenate(core, hypher::Lang::English) {
        offset += syllable.len();
        if offset >= 3 && core.len() >= offset + 3 {
            cuts.push(offset);
        }
    }
    cuts
}
