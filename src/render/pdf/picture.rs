//! Scenes on the page: the figure's primitives as drawing operations.

use super::canvas::Canvas;
use super::strip::Glyphs;
use crate::render::face::{label_face, shift_rise, shift_scale};
use crate::render::scene::{Anchor, Item, Point, Scene, Segment, Stroke, Text};

impl Canvas<'_> {
    /// Draws a scene with its top left corner at (x, y).
    pub(super) fn scene(&mut self, scene: &Scene, x: f32, y: f32, scale: f32) {
        let frame = Frame { x, y, scale };
        self.items(&scene.items, frame);
    }

    fn items(&mut self, items: &[Item], frame: Frame) {
        for item in items {
            match item {
                Item::Line { points, stroke } => {
                    self.pen(&frame.stroke(stroke));
                    let mut segments: Vec<Segment> = points
                        .iter()
                        .map(|p| Segment::Line(frame.point(*p)))
                        .collect();
                    if let Some(first) = points.first() {
                        segments[0] = Segment::Move(frame.point(*first));
                    }
                    self.path(&segments);
                    self.op("S", &[]);
                }
                Item::Polygon { points, fill } => {
                    self.fill(*fill);
                    let mut segments: Vec<Segment> = points
                        .iter()
                        .map(|p| Segment::Line(frame.point(*p)))
                        .collect();
                    if let Some(first) = points.first() {
                        segments[0] = Segment::Move(frame.point(*first));
                    }
                    self.path(&segments);
                    self.op("f", &[]);
                }
                Item::Path {
                    segments,
                    fill,
                    stroke,
                } => {
                    if let Some(fill) = fill {
                        self.fill(fill.colour);
                    }
                    if let Some(stroke) = stroke {
                        self.pen(&frame.stroke(stroke));
                    }
                    self.path(&frame.segments(segments));
                    let operator = match (fill, stroke) {
                        (Some(fill), Some(_)) => {
                            if fill.even_odd {
                                "B*"
                            } else {
                                "B"
                            }
                        }
                        (Some(fill), None) => {
                            if fill.even_odd {
                                "f*"
                            } else {
                                "f"
                            }
                        }
                        (None, Some(_)) => "S",
                        (None, None) => "n",
                    };
                    self.op(operator, &[]);
                }
                Item::Text(text) => self.label(text, frame),
                Item::Clipped {
                    clip,
                    even_odd,
                    items,
                } => {
                    self.op("q", &[]);
                    self.path(&frame.segments(clip));
                    self.op(if *even_odd { "W*" } else { "W" }, &[]);
                    self.op("n", &[]);
                    self.items(items, frame);
                    self.op("Q", &[]);
                    self.fill = None;
                }
            }
        }
    }

    fn label(&mut self, text: &Text, frame: Frame) {
        let size = text.size * frame.scale;
        let back = match text.anchor {
            Anchor::Start => 0.0,
            Anchor::Middle => text.width / 2.0,
            Anchor::End => text.width,
        };
        let at = frame.point(text.at);
        let mut along = -back * frame.scale;
        for run in &text.label.0 {
            let run_size = size * shift_scale(run.shift);
            let rise = size * shift_rise(run.shift);
            for shaped in self
                .faces
                .shape(label_face(run.italic, text.strong), &run.text, true)
                .iter()
            {
                let (x, baseline) = if text.upwards {
                    (at.x - rise, at.y - along)
                } else {
                    (at.x + along, at.y - rise)
                };
                let glyphs = Glyphs {
                    face: shaped.face,
                    size: run_size,
                    x,
                    baseline,
                    colour: text.colour,
                    glyphs: shaped.glyphs.clone(),
                    stretch: 0.0,
                    upwards: text.upwards,
                };
                along += glyphs.width();
                self.glyphs(&glyphs, 0.0);
            }
        }
    }
}

#[derive(Clone, Copy)]
struct Frame {
    x: f32,
    y: f32,
    scale: f32,
}

impl Frame {
    fn point(&self, p: Point) -> Point {
        Point {
            x: self.x + p.x * self.scale,
            y: self.y + p.y * self.scale,
        }
    }

    fn segments(&self, segments: &[Segment]) -> Vec<Segment> {
        let moved = |segment: &Segment| match segment {
            Segment::Move(p) => Segment::Move(self.point(*p)),
            Segment::Line(p) => Segment::Line(self.point(*p)),
            Segment::Curve(a, b, p) => {
                Segment::Curve(self.point(*a), self.point(*b), self.point(*p))
            }
            Segment::Close => Segment::Close,
        };
        segments.iter().map(moved).collect()
    }

    fn stroke(&self, stroke: &Stroke) -> Stroke {
        Stroke {
            width: stroke.width * self.scale,
            dash: stroke.dash.iter().map(|d| d * self.scale).collect(),
            ..stroke.clone()
        }
    }
}
