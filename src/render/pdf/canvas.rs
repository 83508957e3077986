//! One page as drawing operations. Positions come in with y downwards from the top of the sheet.

use std::collections::BTreeMap;

use printpdf::{Codepoint, DictItem, FontId, Op, PdfFontHandle, Pt, TextItem, TextMatrix};

use super::font::resource_name;
use super::strip::{Drawn, Glyphs};
use super::text::SPACE;
use crate::render::face::{FaceId, Faces, Glyph};
use crate::render::scene::{Area, Cap, Point, Segment, Stroke};
use crate::render::style::Rgb;

/// Why content is no part of the structure (ISO 32000-1, 14.8.2.2).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Artifact {
    /// Rules and grounds.
    Layout,
    Header,
    Footer,
    Watermark,
}

pub struct Canvas<'a> {
    pub ops: Vec<Op>,
    height: f32,
    pub(super) faces: &'a Faces,
    pub(super) fill: Option<Rgb>,
}

impl<'a> Canvas<'a> {
    pub fn new(height: f32, faces: &'a Faces) -> Canvas<'a> {
        Canvas {
            ops: Vec::new(),
            height,
            faces,
            fill: None,
        }
    }

    /// Opens content that belongs to an element of the structure.
    pub fn begin(&mut self, role: &str, id: usize) {
        let map = BTreeMap::from([("MCID".to_owned(), DictItem::Int(id as i64))]);
        self.ops.push(Op::BeginMarkedContentWithProperties {
            tag: role.to_owned(),
            properties: DictItem::Dict { map },
        });
    }

    /// Opens content that belongs to no element of the structure.
    pub fn begin_artifact(&mut self, artifact: Artifact) {
        let (kind, part) = match artifact {
            Artifact::Layout => ("Layout", None),
            Artifact::Header => ("Pagination", Some("Header")),
            Artifact::Footer => ("Pagination", Some("Footer")),
            Artifact::Watermark => ("Pagination", Some("Watermark")),
        };
        let name = |text: &str| DictItem::Name(text.as_bytes().to_vec());
        let mut map = BTreeMap::from([("Type".to_owned(), name(kind))]);
        if let Some(part) = part {
            map.insert("Subtype".to_owned(), name(part));
        }
        self.ops.push(Op::BeginMarkedContentWithProperties {
            tag: "Artifact".to_owned(),
            properties: DictItem::Dict { map },
        });
    }

    pub fn end(&mut self) {
        self.ops.push(Op::EndMarkedContent);
    }

    /// Draws a mark of a strip whose top edge is at `top`.
    pub fn mark(&mut self, mark: &Drawn, top: f32) {
        match mark {
            Drawn::Glyphs(run) => self.glyphs(run, top),
            Drawn::Fill { area, colour } => self.fill_area(&shifted(area, top), *colour),
            Drawn::Outline {
                area,
                colour,
                width,
            } => {
                self.pen(&Stroke::solid(*colour, *width));
                let a = shifted(area, top);
                self.op(
                    "re",
                    &[
                        a.left,
                        self.height - a.bottom,
                        a.right - a.left,
                        a.bottom - a.top,
                    ],
                );
                self.op("S", &[]);
            }
            Drawn::Tick { area, colour } => {
                self.pen(&Stroke {
                    colour: *colour,
                    width: 1.1,
                    dash: Vec::new(),
                    cap: Cap::Round,
                });
                let a = shifted(area, top);
                let (w, h) = (a.right - a.left, a.bottom - a.top);
                let p = |u: f32, v: f32| Point {
                    x: a.left + u * w,
                    y: a.top + v * h,
                };
                self.path(&[
                    Segment::Move(p(0.2, 0.52)),
                    Segment::Line(p(0.42, 0.76)),
                    Segment::Line(p(0.82, 0.2)),
                ]);
                self.op("S", &[]);
            }
            Drawn::Scene { scene, x, y, scale } => self.scene(scene, *x, top + y, *scale),
            Drawn::Raster { index, area } => {
                let a = shifted(area, top);
                self.op("q", &[]);
                self.op(
                    "cm",
                    &[
                        a.right - a.left,
                        0.0,
                        0.0,
                        a.bottom - a.top,
                        a.left,
                        self.height - a.bottom,
                    ],
                );
                let name = DictItem::Name(image_name(*index).into_bytes());
                self.ops.push(Op::Unknown {
                    key: "Do".to_owned(),
                    value: vec![name],
                });
                self.op("Q", &[]);
            }
            // The page number is set by the page, which knows it.
            Drawn::PageNumber(_) => {}
        }
    }

    /// Sets one line of text of a single look; returns its width.
    pub fn line(
        &mut self,
        face: FaceId,
        size: f32,
        text: &str,
        x: f32,
        baseline: f32,
        colour: Rgb,
    ) -> f32 {
        let mut pen = x;
        for run in self.faces.shape(face, text, true).iter() {
            let run = Glyphs {
                face: run.face,
                size,
                x: pen,
                baseline,
                colour,
                glyphs: run.glyphs.clone(),
                stretch: 0.0,
                upwards: false,
            };
            pen += run.width();
            self.glyphs(&run, 0.0);
        }
        pen - x
    }

    pub fn fill_area(&mut self, area: &Area, colour: Rgb) {
        self.fill(colour);
        self.op(
            "re",
            &[
                area.left,
                self.height - area.bottom,
                area.right - area.left,
                area.bottom - area.top,
            ],
        );
        self.op("f", &[]);
    }

    pub fn fill_path(&mut self, segments: &[Segment], colour: Rgb) {
        self.fill(colour);
        self.path(segments);
        self.op("f", &[]);
    }

    pub(super) fn glyphs(&mut self, run: &Glyphs, top: f32) {
        self.fill(run.colour);
        let (x, y) = (run.x, self.height - run.baseline - top);
        // Glyphs that a mark moves off the line (accents set by position) start an operation of their own.
        let mut start = 0;
        let mut pen = 0.0;
        let mut started = 0.0;
        for i in 0..=run.glyphs.len() {
            let moved = run
                .glyphs
                .get(i)
                .is_some_and(|glyph| glyph.dx != 0.0 || glyph.dy != 0.0);
            let after_moved = i > 0
                && run
                    .glyphs
                    .get(i - 1)
                    .is_some_and(|glyph| glyph.dx != 0.0 || glyph.dy != 0.0);
            if i > start && (moved || after_moved || i == run.glyphs.len()) {
                let first = &run.glyphs[start];
                let along = started + first.dx * run.size / 1000.0;
                let across = first.dy * run.size / 1000.0;
                let matrix = match run.upwards {
                    false => [1.0, 0.0, 0.0, 1.0, x + along, y + across],
                    true => [0.0, 1.0, -1.0, 0.0, x - across, y + along],
                };
                self.text_op(
                    run.face,
                    run.size,
                    matrix,
                    &run.glyphs[start..i],
                    run.stretch,
                );
                start = i;
                started = pen;
            }
            if let Some(glyph) = run.glyphs.get(i) {
                pen += glyph.advance * run.size / 1000.0
                    + if glyph.text == " " { run.stretch } else { 0.0 };
            }
        }
    }

    /// Shows glyphs; offsets make up for the whole-number widths that the writer puts into the font's table.
    fn text_op(
        &mut self,
        face: FaceId,
        size: f32,
        matrix: [f32; 6],
        glyphs: &[Glyph],
        stretch: f32,
    ) {
        let scale = 1000.0 / self.faces.metrics(face).units_per_em;
        let (mut viewer, mut wanted) = (0.0_f32, 0.0_f32);
        let mut codes = Vec::with_capacity(glyphs.len());
        for (i, glyph) in glyphs.iter().enumerate() {
            let id = if glyph.id == SPACE {
                self.space(face)
            } else {
                glyph.id
            };
            viewer += (f32::from(self.faces.advance(face, id)) * scale).trunc();
            wanted += glyph.advance
                + if glyph.text == " " {
                    stretch * 1000.0 / size
                } else {
                    0.0
                };
            let offset = if i + 1 < glyphs.len() {
                ((viewer - wanted) * 10.0).round() / 10.0
            } else {
                0.0
            };
            viewer -= offset;
            let text = if face == FaceId::Math && glyph.text.is_empty() {
                self.faces.math_text(id).to_owned()
            } else {
                glyph.text.clone()
            };
            codes.push(Codepoint::with_cid(id, offset, text));
        }
        self.ops.extend([
            Op::StartTextSection,
            Op::SetFont {
                font: PdfFontHandle::External(FontId(resource_name(face))),
                size: Pt(round(size)),
            },
            Op::SetTextMatrix {
                matrix: TextMatrix::Raw(matrix.map(round)),
            },
            Op::ShowText {
                items: vec![TextItem::GlyphIds(codes)],
            },
            Op::EndTextSection,
        ]);
    }

    fn space(&self, face: FaceId) -> u16 {
        let shaped = self.faces.shape(face, " ", false);
        shaped
            .first()
            .and_then(|run| run.glyphs.first())
            .map_or(0, |glyph| glyph.id)
    }

    pub(super) fn path(&mut self, segments: &[Segment]) {
        let h = self.height;
        for segment in segments {
            match segment {
                Segment::Move(p) => self.op("m", &[p.x, h - p.y]),
                Segment::Line(p) => self.op("l", &[p.x, h - p.y]),
                Segment::Curve(a, b, p) => {
                    self.op("c", &[a.x, h - a.y, b.x, h - b.y, p.x, h - p.y])
                }
                Segment::Close => self.op("h", &[]),
            }
        }
    }

    pub(super) fn pen(&mut self, stroke: &Stroke) {
        self.op("RG", &channels(stroke.colour));
        self.op("w", &[stroke.width]);
        let dash = DictItem::Array(
            stroke
                .dash
                .iter()
                .map(|d| DictItem::Real(round(*d)))
                .collect(),
        );
        self.ops.push(Op::Unknown {
            key: "d".to_owned(),
            value: vec![dash, DictItem::Int(0)],
        });
        let (cap, join) = match stroke.cap {
            Cap::Butt => (0, 0),
            Cap::Round => (1, 1),
            Cap::Square => (2, 0),
        };
        self.ops.push(Op::Unknown {
            key: "J".to_owned(),
            value: vec![DictItem::Int(cap)],
        });
        self.ops.push(Op::Unknown {
            key: "j".to_owned(),
            value: vec![DictItem::Int(join)],
        });
    }

    pub(super) fn fill(&mut self, colour: Rgb) {
        if self.fill != Some(colour) {
            self.op("rg", &channels(colour));
            self.fill = Some(colour);
        }
    }

    pub(super) fn op(&mut self, key: &str, numbers: &[f32]) {
        let value = numbers.iter().map(|n| DictItem::Real(round(*n))).collect();
        self.ops.push(Op::Unknown {
            key: key.to_owned(),
            value,
        });
    }
}

/// Resource name of a pixel image.
pub fn image_name(index: usize) -> String {
    format!("Picture{}", index + 1)
}

fn shifted(area: &Area, top: f32) -> Area {
    Area {
        top: area.top + top,
        bottom: area.bottom + top,
        ..*area
    }
}

fn channels(Rgb(red, green, blue): Rgb) -> [f32; 3] {
    [red, green, blue].map(|channel| f32::from(channel) / 255.0)
}

/// A thousandth of a point is far below what any device resolves.
fn round(value: f32) -> f32 {
    (value * 1000.0).round() / 1000.0
}
