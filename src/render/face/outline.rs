//! Outlines of glyphs as path segments.

use crate::render::scene::{Point, Segment};

#[derive(Default)]
/// Collects the outlines of a line of glyphs at a size of one, y downwards.
pub struct OutlinePen {
    pub segments: Vec<Segment>,
    pub x: f32,
    pub scale: f32,
    last: (f32, f32),
}

impl OutlinePen {
    fn point(&self, x: f32, y: f32) -> Point {
        Point {
            x: self.x + x * self.scale,
            y: -y * self.scale,
        }
    }
}

impl skrifa::outline::OutlinePen for OutlinePen {
    fn move_to(&mut self, x: f32, y: f32) {
        self.last = (x, y);
        self.segments.push(Segment::Move(self.point(x, y)));
    }

    fn line_to(&mut self, x: f32, y: f32) {
        self.last = (x, y);
        self.segments.push(Segment::Line(self.point(x, y)));
    }

    fn quad_to(&mut self, cx: f32, cy: f32, x: f32, y: f32) {
        // A quadratic arc as the cubic arc that equals it.
        let toward = |from: f32, handle: f32| from + (handle - from) * 2.0 / 3.0;
        let (lx, ly) = self.last;
        self.curve_to(
            toward(lx, cx),
            toward(ly, cy),
            toward(x, cx),
            toward(y, cy),
            x,
            y,
        );
    }

    fn curve_to(&mut self, ax: f32, ay: f32, bx: f32, by: f32, x: f32, y: f32) {
        self.last = (x, y);
        let segment = Segment::Curve(self.point(ax, ay), self.point(bx, by), self.point(x, y));
        self.segments.push(segment);
    }

    fn close(&mut self) {
        self.segments.push(Segment::Close);
    }
}
