//! Running text: from inline pieces to words, from words to lines, from lines to marks.

use std::rc::Rc;

use super::formula;
use super::strip::{Drawn, Glyphs, Piece};
use super::tags::{ElementId, Role, Tags};
use super::words;
use crate::record::block::{Inline, Text};
use crate::render::RenderError;
use crate::render::face::{FaceId, Faces, Glyph};
use crate::render::style::Rgb;
use textwrap::core::Fragment;
use textwrap::wrap_algorithms::{Penalties, wrap_first_fit, wrap_optimal_fit};

/// How a piece of text looks.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Look {
    pub family: Family,
    pub strong: bool,
    pub size: f32,
    pub leading: f32,
    pub colour: Rgb,
    /// Colour of references.
    pub accent: Rgb,
    pub hyphenate: bool,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Family {
    Serif,
    Sans,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Setting {
    Left,
    Justified,
    Centred,
    Right,
}

/// Where lines stand: left edge, width, and how they fill it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Slot {
    pub x: f32,
    pub width: f32,
    pub setting: Setting,
}

impl Slot {
    pub fn left(x: f32, width: f32) -> Slot {
        Slot {
            x,
            width,
            setting: Setting::Left,
        }
    }
}

/// Unbreakable matter, with the space that follows it unless a line ends there.
#[derive(Clone, Debug, Default)]
pub struct Word {
    pub(super) bits: Vec<Bit>,
    pub(super) width: f32,
    pub(super) space: f32,
    /// Set at the end of a line that breaks after this part of a word.
    pub(super) hyphen: Option<Bit>,
    pub(super) line_end: bool,
    pub(super) justified: bool,
}

#[derive(Clone, Debug)]
pub(super) struct Bit {
    pub ink: Ink,
    pub width: f32,
    pub source: Source,
}

#[derive(Clone, Debug)]
pub(super) enum Ink {
    Glyphs {
        face: FaceId,
        size: f32,
        colour: Rgb,
        glyphs: Vec<Glyph>,
    },
    Formula {
        layout: Rc<formulary::Layout>,
        colour: Rgb,
    },
}

#[derive(Clone, Debug, PartialEq)]
pub(super) enum Source {
    Plain,
    Link(Rc<str>),
    Formula(Rc<str>),
}

/// A line of words, measured.
#[derive(Clone, Debug)]
pub struct Line {
    words: Vec<Word>,
    pub width: f32,
    /// Height above and below the baseline that the line needs, leading included.
    pub above: f32,
    pub below: f32,
    /// The last line of its paragraph, or one that ends with a forced break.
    last: bool,
}

impl Fragment for Word {
    fn width(&self) -> f64 {
        f64::from(self.width)
    }

    fn whitespace_width(&self) -> f64 {
        // Justified lines may shrink their spaces: let the optimum see them a little narrower than they are.
        f64::from(self.space * if self.justified { 0.86 } else { 1.0 })
    }

    fn penalty_width(&self) -> f64 {
        self.hyphen
            .as_ref()
            .map_or(0.0, |hyphen| f64::from(hyphen.width))
    }
}

/// Turns inline pieces into words.
///
/// # Errors
/// A formula that cannot be laid out.
pub fn words(text: &Text, look: &Look, faces: &Faces) -> Result<Vec<Word>, RenderError> {
    let mut words = Vec::new();
    for part in text.split(|piece| *piece == Inline::Break) {
        if let Some(last) = words.last_mut() {
            let last: &mut Word = last;
            last.line_end = true;
        }
        words::Builder::new(look, faces).part(part, &mut words)?;
    }
    Ok(words)
}

/// Words of plain text.
pub fn plain_words(text: &str, look: &Look, faces: &Faces) -> Vec<Word> {
    // Plain text holds no formula, the only thing that can fail.
    words(&vec![Inline::Text(text.to_owned())], look, faces).unwrap_or_default()
}

/// Width of the words on one line.
pub fn natural_width(words: &[Word]) -> f32 {
    let mut widest = 0.0_f32;
    for line in words.split_inclusive(|word| word.line_end) {
        widest = widest.max(line_width(line));
    }
    widest
}

/// Width of the widest word, long ones counted at no more than `limit`, for they may break.
pub fn least_width(words: &[Word], limit: f32) -> f32 {
    let width = |word: &Word| {
        if word.is_divisible() {
            word.width.min(limit)
        } else {
            word.width
        }
    };
    words
        .iter()
        .map(|word| width(word) + word.hyphen.as_ref().map_or(0.0, |hyphen| hyphen.width))
        .fold(0.0, f32::max)
}

/// Breaks words into lines no wider than `width`.
pub fn lines(words: &[Word], look: &Look, width: f32, setting: Setting) -> Vec<Line> {
    let mut lines = Vec::new();
    for part in words.split_inclusive(|word| word.line_end) {
        let mut part: Vec<Word> = part.iter().flat_map(|word| divided(word, width)).collect();
        part.iter_mut()
            .for_each(|word| word.justified = setting == Setting::Justified);
        let mut penalties = Penalties::new();
        penalties.hyphen_penalty = 2500;
        penalties.nline_penalty = 500;
        let width = f64::from(width) + 0.01;
        let broken: Vec<&[Word]> = wrap_optimal_fit(&part, &[width], &penalties)
            .unwrap_or_else(|_| wrap_first_fit(&part, &[width]));
        let count = broken.len();
        lines.extend(
            broken
                .into_iter()
                .enumerate()
                .map(|(i, words)| measured(words, look, i + 1 == count)),
        );
    }
    lines
}

/// Total height of lines.
pub fn height(lines: &[Line]) -> f32 {
    lines.iter().map(|line| line.above + line.below).sum()
}

/// Sets a line in its slot; pieces go to `element`, links and formulas to elements of their own in it.
pub fn set_line(
    line: &Line,
    slot: Slot,
    baseline: f32,
    element: ElementId,
    tags: &mut Tags,
) -> Vec<Piece> {
    let Slot { x, width, setting } = slot;
    let gaps = line.words.len().saturating_sub(1);
    let spaces = line.words[..gaps]
        .iter()
        .filter(|word| word.space > 0.0)
        .count();
    let slack = width - line.width;
    let justify = setting == Setting::Justified && spaces > 0 && (!line.last || slack < 0.0);
    let stretch = if justify { slack / spaces as f32 } else { 0.0 };
    // A line too loose to justify looks better ragged.
    let stretch = if stretch > line.words.first().map_or(2.0, |word| word.space.max(2.0)) * 2.2 {
        0.0
    } else {
        stretch
    };
    let mut pen = Pen {
        x: x + indent(setting, slack),
        baseline,
        stretch,
        pieces: Vec::new(),
        element,
        tags,
    };
    for (i, word) in line.words.iter().enumerate() {
        for bit in &word.bits {
            pen.bit(bit);
        }
        if i < gaps {
            pen.space(word, stretch);
        } else if let (Some(hyphen), false) = (&word.hyphen, line.last) {
            pen.bit(hyphen);
        }
    }
    pen.pieces
}

fn indent(setting: Setting, slack: f32) -> f32 {
    match setting {
        Setting::Left | Setting::Justified => 0.0,
        Setting::Centred => slack.max(0.0) / 2.0,
        Setting::Right => slack.max(0.0),
    }
}

struct Pen<'a> {
    x: f32,
    baseline: f32,
    stretch: f32,
    pieces: Vec<Piece>,
    element: ElementId,
    tags: &'a mut Tags,
}

impl Pen<'_> {
    fn bit(&mut self, bit: &Bit) {
        let (x, baseline) = (self.x, self.baseline);
        self.x += bit.width;
        match &bit.ink {
            Ink::Glyphs {
                face,
                size,
                colour,
                glyphs,
            } => {
                let stretch = self.stretch;
                let piece = self.piece(&bit.source);
                match piece.marks.last_mut() {
                    // One run of text as long as face, size and colour stay: it extracts as one string.
                    Some(Drawn::Glyphs(run))
                        if run.face == *face && run.size == *size && run.colour == *colour =>
                    {
                        run.glyphs.extend(glyphs.iter().cloned());
                    }
                    _ => piece.marks.push(Drawn::Glyphs(Glyphs {
                        face: *face,
                        size: *size,
                        x,
                        baseline,
                        colour: *colour,
                        glyphs: glyphs.clone(),
                        stretch,
                        upwards: false,
                    })),
                }
            }
            Ink::Formula { layout, colour } => {
                let piece = self.piece(&bit.source);
                piece
                    .marks
                    .extend(formula::marks(layout, x, baseline, *colour));
            }
        }
    }

    fn space(&mut self, word: &Word, stretch: f32) {
        if word.space == 0.0 {
            return;
        }
        self.x += word.space + stretch;
        if let Some(Drawn::Glyphs(run)) = self
            .pieces
            .last_mut()
            .and_then(|piece| piece.marks.last_mut())
        {
            let space = word.space * 1000.0 / run.size;
            run.glyphs.push(Glyph {
                id: SPACE,
                advance: space,
                dx: 0.0,
                dy: 0.0,
                text: " ".to_owned(),
            });
        }
    }

    /// The piece that matter from `source` goes to: the last one, or a new one if the source changes.
    fn piece(&mut self, source: &Source) -> &mut Piece {
        let (element, link) = match source {
            Source::Plain => (self.element, None),
            Source::Link(anchor) => {
                let element = self.tags.inline(Role::Link, self.element, anchor);
                (element, Some(anchor.to_string()))
            }
            Source::Formula(alternative) => {
                let element = self.tags.inline(Role::Formula, self.element, alternative);
                (element, None)
            }
        };
        if self.pieces.last().and_then(|piece| piece.element) != Some(element) {
            self.pieces.push(Piece {
                element: Some(element),
                marks: Vec::new(),
                link,
            });
        }
        let last = self.pieces.len() - 1;
        &mut self.pieces[last]
    }
}

/// Stands for the space glyph of whatever face a run has; the canvas looks the glyph up.
pub const SPACE: u16 = u16::MAX;

impl Word {
    pub(super) fn push(&mut self, bit: Bit) {
        self.width += bit.width;
        self.bits.push(bit);
    }

    fn is_divisible(&self) -> bool {
        self.bits
            .iter()
            .all(|bit| matches!(bit.ink, Ink::Glyphs { .. }))
    }
}

/// Cuts a word that is wider than a whole line wherever the line ends.
fn divided(word: &Word, width: f32) -> Vec<Word> {
    if word.width <= width || !word.is_divisible() {
        return vec![word.clone()];
    }
    let empty = || Word {
        justified: word.justified,
        ..Word::default()
    };
    let mut parts = vec![empty()];
    for bit in &word.bits {
        let Ink::Glyphs {
            face,
            size,
            colour,
            glyphs,
        } = &bit.ink
        else {
            continue;
        };
        for glyph in glyphs {
            let advance = glyph.advance * size / 1000.0;
            let full = parts
                .last()
                .is_some_and(|part| part.width > 0.0 && part.width + advance > width);
            if full && !glyph.text.is_empty() {
                parts.push(empty());
            }
            let Some(part) = parts.last_mut() else {
                continue;
            };
            part.push(Bit {
                width: advance,
                ink: Ink::Glyphs {
                    face: *face,
                    size: *size,
                    colour: *colour,
                    glyphs: vec![glyph.clone()],
                },
                source: bit.source.clone(),
            });
        }
    }
    if let Some(last) = parts.last_mut() {
        last.space = word.space;
        last.line_end = word.line_end;
        last.hyphen = word.hyphen.clone();
    }
    parts
}

fn line_width(words: &[Word]) -> f32 {
    let spaces = words.len().saturating_sub(1);
    words.iter().map(|word| word.width).sum::<f32>()
        + words
            .iter()
            .take(spaces)
            .map(|word| word.space)
            .sum::<f32>()
}

fn measured(words: &[Word], look: &Look, last: bool) -> Line {
    let hyphen = words
        .last()
        .and_then(|word| word.hyphen.as_ref())
        .filter(|_| !last)
        .map_or(0.0, |hyphen| hyphen.width);
    // The baseline stands so that capitals are centred in the leading, plus a trace of air for descenders.
    let below = (look.leading - look.size * 0.66) / 2.0 + look.size * 0.02;
    let (mut above, mut below) = (look.leading - below, below);
    for bit in words.iter().flat_map(|word| &word.bits) {
        // The leading has room for a script; only what is taller than that parts the lines.
        if let Ink::Formula { layout, .. } = &bit.ink {
            above = above.max(layout.ascent - 0.2);
            below = below.max(layout.descent - 1.0);
        }
    }
    Line {
        words: words.to_vec(),
        width: line_width(words) + hyphen,
        above,
        below,
        last,
    }
}
