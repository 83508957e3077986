//! The bundled typefaces: which characters they have, how words are shaped, how wide they are.
//!
//! Owns: font programs, shaping, fallback between faces, the list of characters that no face has.
//! Does not own: placing text, or putting a font program into a file (`pdf::font`).

mod outline;
mod plain;

use std::cell::RefCell;
use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use harfrust::{Feature, FontRef, ShapeOptions, ShaperData, Tag, UnicodeBuffer};
use skrifa::MetadataProvider;
use skrifa::instance::{LocationRef, Size};
use skrifa::outline::DrawSettings;

use super::RenderError;
use super::scene::Segment;
use crate::record::block::{Label, Shift};
use outline::OutlinePen;
use plain::glyph_texts;

#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum FaceId {
    Serif,
    SerifItalic,
    SerifBold,
    Sans,
    SansItalic,
    SansStrong,
    Mono,
    Math,
}

impl FaceId {
    pub const ALL: [FaceId; 8] = [
        FaceId::Serif,
        FaceId::SerifItalic,
        FaceId::SerifBold,
        FaceId::Sans,
        FaceId::SansItalic,
        FaceId::SansStrong,
        FaceId::Mono,
        FaceId::Math,
    ];

    /// PostScript name of the font program.
    pub fn name(self) -> &'static str {
        match self {
            FaceId::Serif => "STIXTwoText",
            FaceId::SerifItalic => "STIXTwoText-Italic",
            FaceId::SerifBold => "STIXTwoText-Bold",
            FaceId::Sans => "SourceSans3-Regular",
            FaceId::SansItalic => "SourceSans3-It",
            FaceId::SansStrong => "SourceSans3-Semibold",
            FaceId::Mono => "IBMPlexMono",
            FaceId::Math => "STIXTwoMath-Regular",
        }
    }

    /// The font program as it was published.
    pub fn program(self) -> &'static [u8] {
        match self {
            FaceId::Serif => include_bytes!("../../templates/fonts/STIXTwoText_400Regular.ttf"),
            FaceId::SerifItalic => {
                include_bytes!("../../templates/fonts/STIXTwoText_400Regular_Italic.ttf")
            }
            FaceId::SerifBold => include_bytes!("../../templates/fonts/STIXTwoText_700Bold.ttf"),
            FaceId::Sans => include_bytes!("../../templates/fonts/SourceSans3_400Regular.ttf"),
            FaceId::SansItalic => {
                include_bytes!("../../templates/fonts/SourceSans3_400Regular_Italic.ttf")
            }
            FaceId::SansStrong => {
                include_bytes!("../../templates/fonts/SourceSans3_600SemiBold.ttf")
            }
            FaceId::Mono => include_bytes!("../../templates/fonts/IBMPlexMono_400Regular.ttf"),
            FaceId::Math => include_bytes!("../../templates/fonts/STIXTwoMath-Regular.otf"),
        }
    }

    /// Where to look for a character that this face lacks, nearest in look first.
    fn fallback(self) -> &'static [FaceId] {
        match self {
            FaceId::Serif | FaceId::SerifItalic | FaceId::SerifBold => {
                &[FaceId::Serif, FaceId::Math, FaceId::Sans, FaceId::Mono]
            }
            FaceId::Sans | FaceId::SansItalic | FaceId::SansStrong => {
                &[FaceId::Sans, FaceId::Serif, FaceId::Math, FaceId::Mono]
            }
            FaceId::Mono => &[FaceId::Sans, FaceId::Serif, FaceId::Math],
            FaceId::Math => &[FaceId::Serif, FaceId::Sans, FaceId::Mono],
        }
    }
}

/// One shaped glyph; lengths in thousandths of an em.
#[derive(Clone, Debug, PartialEq)]
pub struct Glyph {
    pub id: u16,
    pub advance: f32,
    pub dx: f32,
    pub dy: f32,
    /// The characters that it stands for: empty for all but the first glyph of a cluster.
    pub text: String,
}

/// Glyphs of one face in a row.
#[derive(Clone, Debug, PartialEq)]
pub struct GlyphRun {
    pub face: FaceId,
    pub glyphs: Vec<Glyph>,
}

/// Vertical measures of a face and what a font descriptor needs; in units of the font.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Metrics {
    pub units_per_em: f32,
    pub ascent: f32,
    pub descent: f32,
    pub cap_height: f32,
    pub bounds: [f32; 4],
    /// Run of the caret per thousand units of rise: 0 for an upright face.
    pub caret_run: f32,
    pub weight: u16,
}

struct Face {
    font: FontRef<'static>,
    shaper: ShaperData,
    charmap: skrifa::charmap::Charmap<'static>,
    metrics: Metrics,
    advances: Vec<u16>,
}

type Shaped = Rc<[GlyphRun]>;

/// All bundled faces, read once for a document.
pub struct Faces {
    faces: BTreeMap<FaceId, Face>,
    math: formulary::MathFont<'static>,
    math_text: BTreeMap<u16, String>,
    cache: RefCell<BTreeMap<(FaceId, bool), BTreeMap<String, Shaped>>>,
    missing: RefCell<BTreeSet<char>>,
}

impl Faces {
    /// Reads the bundled faces.
    ///
    /// # Errors
    /// [`RenderError::Face`] if a bundled font program is damaged.
    pub fn load() -> Result<Faces, RenderError> {
        let faces = FaceId::ALL
            .iter()
            .map(|id| {
                read_face(*id)
                    .map(|face| (*id, face))
                    .ok_or(RenderError::Face(id.name()))
            })
            .collect::<Result<BTreeMap<_, _>, _>>()?;
        let program = FaceId::Math.program();
        let math = formulary::MathFont::new(program, 0)
            .map_err(|_| RenderError::Face(FaceId::Math.name()))?;
        let math_text = glyph_texts(program).ok_or(RenderError::Face(FaceId::Math.name()))?;
        Ok(Faces {
            faces,
            math,
            math_text,
            cache: RefCell::default(),
            missing: RefCell::default(),
        })
    }

    /// Shapes one word or phrase on a line of its own; characters that the face lacks come from its fallbacks.
    pub fn shape(&self, face: FaceId, text: &str, tabular: bool) -> Shaped {
        if let Some(shaped) = self
            .cache
            .borrow()
            .get(&(face, tabular))
            .and_then(|words| words.get(text))
        {
            return Rc::clone(shaped);
        }
        let runs: Vec<GlyphRun> = self
            .split_by_face(face, text)
            .into_iter()
            .map(|(id, part)| GlyphRun {
                face: id,
                glyphs: self.shape_part(id, &part, tabular),
            })
            .collect();
        let shaped: Shaped = runs.into();
        self.cache
            .borrow_mut()
            .entry((face, tabular))
            .or_default()
            .insert(text.to_owned(), Rc::clone(&shaped));
        shaped
    }

    /// Width of shaped text in points.
    pub fn width(&self, face: FaceId, text: &str, size: f32, tabular: bool) -> f32 {
        let shaped = self.shape(face, text, tabular);
        shaped
            .iter()
            .flat_map(|run| &run.glyphs)
            .map(|glyph| glyph.advance)
            .sum::<f32>()
            * size
            / 1000.0
    }

    /// Width in points of a figure label set at `size`, with its shifted runs.
    pub fn label_width(&self, label: &Label, size: f32, strong: bool) -> f32 {
        label
            .0
            .iter()
            .map(|run| {
                self.width(
                    label_face(run.italic, strong),
                    &run.text,
                    size * shift_scale(run.shift),
                    true,
                )
            })
            .sum()
    }

    pub fn metrics(&self, face: FaceId) -> Metrics {
        self.face(face).metrics
    }

    /// Advance width of a glyph in units of the font.
    pub fn advance(&self, face: FaceId, glyph: u16) -> u16 {
        self.face(face)
            .advances
            .get(usize::from(glyph))
            .copied()
            .unwrap_or(0)
    }

    /// Outline of a line of text at a size of one, y downwards from the baseline, and its width.
    pub fn outline(&self, face: FaceId, text: &str) -> (Vec<Segment>, f32) {
        let mut pen = OutlinePen::default();
        for run in self.shape(face, text, false).iter() {
            let Ok(reader) = skrifa::FontRef::new(run.face.program()) else {
                continue;
            };
            let outlines = reader.outline_glyphs();
            pen.scale = 1.0 / self.metrics(run.face).units_per_em;
            for glyph in &run.glyphs {
                if let Some(outline) = outlines.get(skrifa::GlyphId::from(glyph.id)) {
                    let settings = DrawSettings::unhinted(Size::unscaled(), LocationRef::default());
                    // A damaged outline leaves a gap in the watermark, nothing worse.
                    let _ = outline.draw(settings, &mut pen);
                }
                pen.x += glyph.advance / 1000.0;
            }
        }
        (pen.segments, pen.x)
    }

    /// The face with its table of mathematical constants.
    pub fn math(&self) -> &formulary::MathFont<'static> {
        &self.math
    }

    /// The character that a glyph of the mathematics face stands for, also for its script and size variants.
    pub fn math_text(&self, glyph: u16) -> &str {
        self.math_text.get(&glyph).map_or("", String::as_str)
    }

    pub fn has(&self, face: FaceId, character: char) -> bool {
        self.face(face).charmap.map(character).is_some()
    }

    pub fn note_missing(&self, character: char) {
        self.missing.borrow_mut().insert(character);
    }

    /// Characters met so far that no face has, ascending.
    pub fn missing(&self) -> Vec<char> {
        self.missing.borrow().iter().copied().collect()
    }

    fn face(&self, id: FaceId) -> &Face {
        // `load` fills in every member of `FaceId::ALL`.
        &self.faces[&id]
    }

    fn split_by_face(&self, wanted: FaceId, text: &str) -> Vec<(FaceId, String)> {
        let mut parts: Vec<(FaceId, String)> = Vec::new();
        for character in printable(text).chars() {
            let candidates = std::iter::once(&wanted).chain(wanted.fallback());
            let id = candidates
                .copied()
                .find(|id| self.has(*id, character))
                .unwrap_or_else(|| {
                    self.note_missing(character);
                    wanted
                });
            match parts.last_mut() {
                Some((last, part)) if *last == id => part.push(character),
                _ => parts.push((id, character.to_string())),
            }
        }
        parts
    }

    fn shape_part(&self, id: FaceId, text: &str, tabular: bool) -> Vec<Glyph> {
        let face = self.face(id);
        let mut buffer = UnicodeBuffer::new();
        buffer.push_str(text);
        buffer.guess_segment_properties();
        let mut features = Vec::new();
        if tabular {
            features.push(Feature::new(Tag::new(b"tnum"), 1, ..));
            features.push(Feature::new(Tag::new(b"lnum"), 1, ..));
        }
        if id == FaceId::Mono {
            features.push(Feature::new(Tag::new(b"liga"), 0, ..));
        }
        let shaped = face
            .shaper
            .shaper(&face.font)
            .build()
            .shape(buffer, ShapeOptions::new().features(&features));
        let scale = 1000.0 / face.metrics.units_per_em;
        let infos = shaped.glyph_infos();
        let starts: Vec<usize> = infos.iter().map(|info| info.cluster as usize).collect();
        let glyphs = infos.iter().zip(shaped.glyph_positions()).enumerate();
        glyphs
            .map(|(i, (info, position))| {
                let first_of_cluster = i == 0 || starts[i - 1] != starts[i];
                let end = starts[i..]
                    .iter()
                    .copied()
                    .find(|s| *s != starts[i])
                    .unwrap_or(text.len());
                let characters = text.get(starts[i]..end).unwrap_or_default();
                Glyph {
                    id: info.glyph_id as u16,
                    advance: position.x_advance as f32 * scale,
                    dx: position.x_offset as f32 * scale,
                    dy: position.y_offset as f32 * scale,
                    text: if first_of_cluster {
                        characters.to_owned()
                    } else {
                        String::new()
                    },
                }
            })
            .collect()
    }
}

/// Face of a run in a figure label.
pub fn label_face(italic: bool, strong: bool) -> FaceId {
    match (italic, strong) {
        (true, _) => FaceId::SansItalic,
        (false, true) => FaceId::SansStrong,
        (false, false) => FaceId::Sans,
    }
}

/// Size of a shifted run relative to its base.
pub fn shift_scale(shift: Shift) -> f32 {
    if shift == Shift::Base { 1.0 } else { 0.72 }
}

/// Baseline shift of a run, upwards, in ems of its base.
pub fn shift_rise(shift: Shift) -> f32 {
    match shift {
        Shift::Base => 0.0,
        Shift::Subscript => -0.17,
        Shift::Superscript => 0.35,
    }
}

/// Text as it can be shown: white space becomes a space, other control characters become their escape,
/// characters without any appearance go.
pub fn printable(text: &str) -> String {
    use unicode_normalization::UnicodeNormalization;
    let mut shown = String::with_capacity(text.len());
    for character in text.nfc() {
        match character {
            '\t' | '\n' | '\r' | '\u{2028}' | '\u{2029}' => shown.push(' '),
            '\u{ad}'
            | '\u{200b}'..='\u{200f}'
            | '\u{2060}'
            | '\u{202a}'..='\u{202e}'
            | '\u{2066}'..='\u{2069}'
            | '\u{feff}' => {}
            c if c.is_control() => shown.extend(c.escape_unicode()),
            c => shown.push(c),
        }
    }
    shown
}

fn read_face(id: FaceId) -> Option<Face> {
    let program = id.program();
    let font = FontRef::new(program).ok()?;
    let reader = skrifa::FontRef::new(program).ok()?;
    let metrics = reader.metrics(Size::unscaled(), LocationRef::default());
    let glyphs = reader.glyph_metrics(Size::unscaled(), LocationRef::default());
    let advances = (0..metrics.glyph_count)
        .map(|g| {
            glyphs
                .advance_width(skrifa::GlyphId::from(g))
                .unwrap_or(0.0) as u16
        })
        .collect();
    let bounds = metrics.bounds?;
    Some(Face {
        shaper: ShaperData::new(&font),
        font,
        charmap: reader.charmap(),
        metrics: Metrics {
            units_per_em: f32::from(metrics.units_per_em),
            ascent: metrics.ascent,
            descent: metrics.descent,
            cap_height: metrics.cap_height.unwrap_or(metrics.ascent),
            bounds: [bounds.x_min, bounds.y_min, bounds.x_max, bounds.y_max],
            caret_run: caret_run(metrics.italic_angle),
            weight: reader.attributes().weight.value() as u16,
        },
        advances,
    })
}

/// The slant as a run: a series of the tangent, since a slant is a small angle (error below 1 in 1000 at 20°).
fn caret_run(italic_angle_degrees: f32) -> f32 {
    let angle = -italic_angle_degrees * std::f32::consts::PI / 180.0;
    (angle + angle * angle * angle / 3.0) * 1000.0
}
