//! The plotters side: grid, levels and curves drawn by plotters into our scene.
//!
//! plotters knows no dashes and counts in integers: the colour handed to it is an index into a list of pens, and
//! one point is [`UNITS`] of its units.

use std::convert::Infallible;
use std::ops::Range;

use plotters::coord::ranged1d::{KeyPointHint, NoDefaultFormatting, Ranged, ValueFormatter};
use plotters::prelude::*;
use plotters_backend::{
    BackendColor, BackendCoord, BackendStyle, BackendTextStyle, DrawingErrorKind,
};

use super::{Frame, fraction, stroke_of};
use crate::record::block::{Axis, Plot};
use crate::render::scene::{Area, Cap, Item, Point, Stroke};
use crate::render::style::PageStyle;

const UNITS: f32 = 50.0;

/// Draws, from the back to the front: minor grid, grid, levels, instants, curves.
pub fn grid_and_curves(
    plot: &Plot,
    frames: &[Frame<'_>],
    style: &PageStyle,
    items: &mut Vec<Item>,
) {
    let figure = &style.figure;
    let mut pens = vec![
        Stroke::solid(figure.minor_grid, 0.35),
        Stroke::solid(figure.grid, 0.45),
        Stroke {
            colour: figure.mark,
            width: 0.9,
            dash: vec![4.0, 2.0, 1.0, 2.0],
            cap: Cap::Butt,
        },
        Stroke {
            colour: figure.instant,
            width: 0.6,
            dash: vec![2.0, 2.0],
            cap: Cap::Butt,
        },
    ];
    let first_line = pens.len();
    pens.extend((0..style.lines.len()).map(|index| stroke_of(style, index)));
    for frame in frames {
        let canvas = Canvas {
            area: frame.area,
            pens: &pens,
            items,
        };
        // Drawing into a list cannot fail.
        let _ = panel(plot, frame, style.lines.len(), first_line, canvas);
    }
}

fn panel(
    plot: &Plot,
    frame: &Frame<'_>,
    lines: usize,
    first_line: usize,
    canvas: Canvas<'_>,
) -> Result<(), DrawingAreaErrorKind<Infallible>> {
    let area = frame.area;
    let root = canvas.into_drawing_area();
    let mut chart = ChartBuilder::on(&root)
        .build_cartesian_2d(UnitAxis::new(&plot.x), UnitAxis::new(&frame.panel.y))?;
    let mut mesh = chart.configure_mesh();
    mesh.light_line_style(pen(0))
        .bold_line_style(pen(1))
        .disable_axes()
        .draw()?;
    for level in &frame.panel.levels {
        let v = fraction(&frame.panel.y, level.at);
        if (0.0..=1.0).contains(&v) {
            chart.draw_series(LineSeries::new([(0.0, v), (1.0, v)], pen(2)))?;
        }
    }
    for instant in &frame.panel.instants {
        let u = fraction(&plot.x, instant.at);
        if (0.0..=1.0).contains(&u) {
            chart.draw_series(LineSeries::new([(u, 0.0), (u, 1.0)], pen(3)))?;
        }
    }
    let unit = |p: &Point| {
        let u = (p.x - area.left) / (area.right - area.left);
        let v = (area.bottom - p.y) / (area.bottom - area.top);
        (f64::from(u), f64::from(v))
    };
    for curve in &frame.curves {
        let index = first_line + frame.panel.series[curve.series].style % lines;
        for piece in &curve.pieces {
            chart.draw_series(LineSeries::new(piece.iter().map(unit), pen(index)))?;
        }
    }
    Ok(())
}

/// The colour that stands for a pen.
fn pen(index: usize) -> RGBColor {
    RGBColor((index >> 8) as u8, (index & 0xff) as u8, 0)
}

/// An axis in fractions of its length, with the ticks of the record as key points.
struct UnitAxis {
    ticks: Vec<f64>,
    minor: Vec<f64>,
}

impl UnitAxis {
    fn new(axis: &Axis) -> UnitAxis {
        let inside = |value: &f64| (0.0..=1.0).contains(value);
        UnitAxis {
            ticks: axis
                .ticks
                .iter()
                .map(|tick| fraction(axis, tick.at))
                .filter(inside)
                .collect(),
            minor: axis
                .minor
                .iter()
                .map(|at| fraction(axis, *at))
                .filter(inside)
                .collect(),
        }
    }
}

impl Ranged for UnitAxis {
    type FormatOption = NoDefaultFormatting;
    type ValueType = f64;

    fn map(&self, value: &f64, limit: (i32, i32)) -> i32 {
        limit.0 + (value * f64::from(limit.1 - limit.0)).round() as i32
    }

    fn key_points<Hint: KeyPointHint>(&self, hint: Hint) -> Vec<f64> {
        if hint.weight().allow_light_points() {
            self.minor.clone()
        } else {
            self.ticks.clone()
        }
    }

    fn range(&self) -> Range<f64> {
        0.0..1.0
    }
}

impl ValueFormatter<f64> for UnitAxis {
    // Labels have italics and superscripts, which plotters cannot set: the figure sets them itself.
    fn format(_: &f64) -> String {
        String::new()
    }
}

struct Canvas<'a> {
    area: Area,
    pens: &'a [Stroke],
    items: &'a mut Vec<Item>,
}

impl Canvas<'_> {
    fn point(&self, (x, y): BackendCoord) -> Point {
        Point {
            x: self.area.left + x as f32 / UNITS,
            y: self.area.top + y as f32 / UNITS,
        }
    }

    fn stroke(&self, style: &impl BackendStyle) -> Stroke {
        let (high, low, _) = style.color().rgb;
        self.pens[(usize::from(high) << 8 | usize::from(low)).min(self.pens.len() - 1)].clone()
    }
}

type Drawn = Result<(), DrawingErrorKind<Infallible>>;

impl DrawingBackend for Canvas<'_> {
    type ErrorType = Infallible;

    fn get_size(&self) -> (u32, u32) {
        let Area {
            left,
            top,
            right,
            bottom,
        } = self.area;
        // One unit more than the last coordinate, so that a line on the far edge lies inside.
        (
            ((right - left) * UNITS).round() as u32 + 1,
            ((bottom - top) * UNITS).round() as u32 + 1,
        )
    }

    fn ensure_prepared(&mut self) -> Drawn {
        Ok(())
    }

    fn present(&mut self) -> Drawn {
        Ok(())
    }

    fn draw_pixel(&mut self, _: BackendCoord, _: BackendColor) -> Drawn {
        Ok(())
    }

    fn draw_line<S: BackendStyle>(
        &mut self,
        from: BackendCoord,
        to: BackendCoord,
        style: &S,
    ) -> Drawn {
        self.draw_path([from, to], style)
    }

    fn draw_path<S: BackendStyle, I: IntoIterator<Item = BackendCoord>>(
        &mut self,
        path: I,
        style: &S,
    ) -> Drawn {
        let points: Vec<Point> = path.into_iter().map(|c| self.point(c)).collect();
        if points.len() > 1 {
            let stroke = self.stroke(style);
            self.items.push(Item::Line { points, stroke });
        }
        Ok(())
    }

    fn draw_text<T: BackendTextStyle>(&mut self, _: &str, _: &T, _: BackendCoord) -> Drawn {
        Ok(())
    }

    fn estimate_text_size<T: BackendTextStyle>(
        &self,
        _: &str,
        _: &T,
    ) -> Result<(u32, u32), DrawingErrorKind<Infallible>> {
        Ok((0, 0))
    }
}
