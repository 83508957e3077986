//! What layout hands to page breaking: strips of fixed height, each with the marks that stand on it.

use std::rc::Rc;

use super::tags::ElementId;
use crate::render::face::{FaceId, Glyph};
use crate::render::scene::{Area, Scene};
use crate::render::style::Rgb;

/// A horizontal strip over the whole page width that is never broken. Marks count y from its top.
#[derive(Clone, Debug, Default)]
pub struct Strip {
    pub height: f32,
    /// Space above; dropped at the head of a page.
    pub before: f32,
    /// The next strip must stand on the same page.
    pub keep_next: bool,
    pub new_page: bool,
    pub pieces: Vec<Piece>,
    pub band: Option<Band>,
    /// Heads that are repeated above this strip when it opens a page: index into [`Flow::heads`].
    pub head: Option<usize>,
    pub anchor: Option<String>,
    pub outline: Option<OutlineEntry>,
    /// The strip and those chained to it may stand a little later, at the head of the next page.
    pub floats: bool,
    /// The page that this strip stands on has no running head: the cover.
    pub cover: bool,
}

/// Marks that belong to one element of the document's structure, or to none (rules, repeated heads).
#[derive(Clone, Debug)]
pub struct Piece {
    pub element: Option<ElementId>,
    pub marks: Vec<Drawn>,
    /// Anchor that a click on the piece leads to.
    pub link: Option<String>,
}

#[derive(Clone, Debug)]
pub enum Drawn {
    Glyphs(Glyphs),
    Fill {
        area: Area,
        colour: Rgb,
    },
    /// An empty box with an outline.
    Outline {
        area: Area,
        colour: Rgb,
        width: f32,
    },
    /// A tick inside a box.
    Tick {
        area: Area,
        colour: Rgb,
    },
    Scene {
        scene: Rc<Scene>,
        x: f32,
        y: f32,
        scale: f32,
    },
    Raster {
        index: usize,
        area: Area,
    },
    PageNumber(PageNumber),
}

/// The number of the page on which an anchor stands, right-aligned at `right`, with leaders from `from`.
#[derive(Clone, Debug)]
pub struct PageNumber {
    pub anchor: String,
    pub from: f32,
    pub right: f32,
    pub baseline: f32,
    pub size: f32,
    pub strong: bool,
}

/// Glyphs of one face on one baseline.
#[derive(Clone, Debug)]
pub struct Glyphs {
    pub face: FaceId,
    pub size: f32,
    pub x: f32,
    pub baseline: f32,
    pub colour: Rgb,
    pub glyphs: Vec<Glyph>,
    /// Added to every space of the run, in points.
    pub stretch: f32,
    pub upwards: bool,
}

/// Strips with the same band stand on one tinted ground with a bar at its left.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    pub id: usize,
    pub left: f32,
    pub right: f32,
    pub ground: Rgb,
    pub bar: Option<Rgb>,
}

#[derive(Clone, Debug)]
pub struct OutlineEntry {
    pub level: u8,
    pub title: String,
}

/// What a table repeats when it goes on over a page.
#[derive(Clone, Debug)]
pub struct RunningHead {
    /// Above the first row of the new page.
    pub strips: Vec<Strip>,
    /// Below the last row of the old page.
    pub tail: Piece,
}

/// The whole document before page breaking.
#[derive(Default)]
pub struct Flow {
    pub strips: Vec<Strip>,
    pub heads: Vec<RunningHead>,
    pub rasters: Vec<crate::render::sketch::Raster>,
}

impl Strip {
    pub fn new(height: f32) -> Strip {
        Strip {
            height,
            ..Strip::default()
        }
    }

    pub fn rule(left: f32, right: f32, y: f32, thickness: f32, colour: Rgb) -> Piece {
        let area = Area {
            left,
            right,
            top: y - thickness / 2.0,
            bottom: y + thickness / 2.0,
        };
        Piece {
            element: None,
            marks: vec![Drawn::Fill { area, colour }],
            link: None,
        }
    }
}

impl Glyphs {
    pub fn width(&self) -> f32 {
        let spaces = self.glyphs.iter().filter(|glyph| glyph.text == " ").count() as f32;
        self.glyphs.iter().map(|glyph| glyph.advance).sum::<f32>() * self.size / 1000.0
            + spaces * self.stretch
    }
}

impl Piece {
    /// A place in the structure without any mark: an empty cell.
    pub fn empty(element: ElementId) -> Piece {
        Piece {
            element: Some(element),
            marks: Vec::new(),
            link: None,
        }
    }

    /// The space that the letters of the piece take up, if it has any.
    pub fn text_area(&self) -> Option<Area> {
        self.marks
            .iter()
            .filter_map(Drawn::text_area)
            .reduce(|a, b| Area {
                left: a.left.min(b.left),
                top: a.top.min(b.top),
                right: a.right.max(b.right),
                bottom: a.bottom.max(b.bottom),
            })
    }

    pub fn text(&self) -> String {
        let glyphs = self.marks.iter().filter_map(|mark| match mark {
            Drawn::Glyphs(run) => Some(
                run.glyphs
                    .iter()
                    .map(|g| g.text.as_str())
                    .collect::<String>(),
            ),
            _ => None,
        });
        glyphs.collect()
    }
}

impl Drawn {
    fn text_area(&self) -> Option<Area> {
        match self {
            Drawn::Glyphs(run) if !run.glyphs.is_empty() => {
                // Capitals above, a shallow descent below: leading may be as tight as the letters allow.
                let (top, bottom) = (
                    run.baseline - run.size * 0.66,
                    run.baseline + run.size * 0.2,
                );
                Some(Area {
                    left: run.x,
                    top,
                    right: run.x + run.width(),
                    bottom,
                })
            }
            _ => None,
        }
    }

    /// Moves the mark by (dx, dy).
    pub fn shift(&mut self, dx: f32, dy: f32) {
        match self {
            Drawn::Glyphs(run) => {
                run.x += dx;
                run.baseline += dy;
            }
            Drawn::Fill { area, .. }
            | Drawn::Outline { area, .. }
            | Drawn::Tick { area, .. }
            | Drawn::Raster { area, .. } => {
                *area = Area {
                    left: area.left + dx,
                    right: area.right + dx,
                    top: area.top + dy,
                    bottom: area.bottom + dy,
                };
            }
            Drawn::Scene { x, y, .. } => {
                *x += dx;
                *y += dy;
            }
            Drawn::PageNumber(number) => {
                number.from += dx;
                number.right += dx;
                number.baseline += dy;
            }
        }
    }
}

impl PageNumber {
    /// The space from the entry's words to the right edge.
    pub fn area(&self) -> Area {
        Area {
            left: self.from,
            top: self.baseline - self.size,
            right: self.right,
            bottom: self.baseline + 2.0,
        }
    }
}
