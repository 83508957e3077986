//! A picture as a list of primitives in points, origin at the top left, y downwards.
//!
//! The same scene becomes an SVG file (`svg`) and part of a page (`pdf::canvas`).

use super::style::Rgb;
use crate::record::block::Label;

#[derive(Clone, Debug, PartialEq)]
pub struct Scene {
    pub width: f32,
    pub height: f32,
    pub items: Vec<Item>,
}

#[derive(Clone, Debug, PartialEq)]
pub enum Item {
    /// An open line through two or more points.
    Line {
        points: Vec<Point>,
        stroke: Stroke,
    },
    /// A filled area with straight edges.
    Polygon {
        points: Vec<Point>,
        fill: Rgb,
    },
    /// A path with curves, filled, stroked or both.
    Path {
        segments: Vec<Segment>,
        fill: Option<Fill>,
        stroke: Option<Stroke>,
    },
    Text(Text),
    /// Items that show only inside a path.
    Clipped {
        clip: Vec<Segment>,
        even_odd: bool,
        items: Vec<Item>,
    },
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point {
    pub x: f32,
    pub y: f32,
}

#[derive(Clone, Debug, PartialEq)]
pub struct Stroke {
    pub colour: Rgb,
    pub width: f32,
    /// Lengths of dashes and gaps; empty for a solid line.
    pub dash: Vec<f32>,
    pub cap: Cap,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Cap {
    Butt,
    Round,
    Square,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Fill {
    pub colour: Rgb,
    pub even_odd: bool,
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Segment {
    Move(Point),
    Line(Point),
    Curve(Point, Point, Point),
    Close,
}

/// A label on one line; `at` is on the baseline.
#[derive(Clone, Debug, PartialEq)]
pub struct Text {
    pub at: Point,
    pub anchor: Anchor,
    pub size: f32,
    pub colour: Rgb,
    pub strong: bool,
    /// Reads upwards instead of to the right.
    pub upwards: bool,
    pub label: Label,
    /// Width as measured with the bundled faces.
    pub width: f32,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Anchor {
    Start,
    Middle,
    End,
}

/// An upright rectangle.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Area {
    pub left: f32,
    pub top: f32,
    pub right: f32,
    pub bottom: f32,
}

impl Stroke {
    pub fn solid(colour: Rgb, width: f32) -> Stroke {
        Stroke {
            colour,
            width,
            dash: Vec::new(),
            cap: Cap::Butt,
        }
    }
}

impl Text {
    /// The space that the letters take up: capitals above the baseline, a shallow descent below it.
    pub fn area(&self) -> Area {
        let back = match self.anchor {
            Anchor::Start => 0.0,
            Anchor::Middle => self.width / 2.0,
            Anchor::End => self.width,
        };
        let (rise, drop) = (self.size * 0.7, self.size * 0.2);
        if self.upwards {
            let bottom = self.at.y + back;
            Area {
                left: self.at.x - rise,
                top: bottom - self.width,
                right: self.at.x + drop,
                bottom,
            }
        } else {
            let left = self.at.x - back;
            Area {
                left,
                top: self.at.y - rise,
                right: left + self.width,
                bottom: self.at.y + drop,
            }
        }
    }
}

impl Area {
    pub fn overlaps(&self, other: &Area) -> bool {
        self.left < other.right
            && other.left < self.right
            && self.top < other.bottom
            && other.top < self.bottom
    }

    pub fn grown(&self, by: f32) -> Area {
        Area {
            left: self.left - by,
            top: self.top - by,
            right: self.right + by,
            bottom: self.bottom + by,
        }
    }

    pub fn holds(&self, other: &Area) -> bool {
        self.left <= other.left
            && self.top <= other.top
            && self.right >= other.right
            && self.bottom >= other.bottom
    }

    /// Whether a straight line passes through the rectangle (separating axes of a segment and a box).
    pub fn meets(&self, a: Point, b: Point) -> bool {
        if a.x.max(b.x) < self.left
            || a.x.min(b.x) > self.right
            || a.y.max(b.y) < self.top
            || a.y.min(b.y) > self.bottom
        {
            return false;
        }
        let side = |x: f32, y: f32| (b.x - a.x) * (y - a.y) - (b.y - a.y) * (x - a.x);
        let corners = [
            side(self.left, self.top),
            side(self.right, self.top),
            side(self.left, self.bottom),
            side(self.right, self.bottom),
        ];
        !(corners.iter().all(|s| *s > 0.0) || corners.iter().all(|s| *s < 0.0))
    }
}
