//! Axes: frame, ticks, tick labels, titles, markers.

use super::{Frame, PANEL_GAP, Pencil, TICK, horizontal, vertical};
use crate::record::block::{Axis, Plot, Scale};
use crate::render::scene::{Anchor, Area, Cap, Fill, Item, Point, Segment, Stroke};
use crate::render::style::{LineStyle, Marker};

/// Width of the strip left of the panels: title, tick labels, ticks.
pub fn gutter(plot: &Plot, pencil: &Pencil<'_>) -> f32 {
    let size = pencil.label_size();
    let ticks = plot.panels.iter().flat_map(|panel| &panel.y.ticks);
    let widest = ticks
        .map(|tick| pencil.faces.label_width(&tick.label, size, false))
        .fold(0.0, f32::max);
    pencil.style.figure.title_pt + 7.0 + widest + TICK + 3.0
}

/// Left and lower edge, ticks and tick labels of the ordinate, its title, and the markers of the curves.
pub fn frame(frame: &Frame<'_>, pencil: &Pencil<'_>, items: &mut Vec<Item>) {
    let (area, axis) = (frame.area, &frame.panel.y);
    let pen = Stroke {
        cap: Cap::Square,
        ..Stroke::solid(pencil.style.figure.axis, 0.6)
    };
    let corner = [
        Point {
            x: area.left,
            y: area.top,
        },
        Point {
            x: area.left,
            y: area.bottom,
        },
        Point {
            x: area.right,
            y: area.bottom,
        },
    ];
    items.push(Item::Line {
        points: corner.to_vec(),
        stroke: pen.clone(),
    });

    let size = pencil.label_size();
    let mut lowest_free = f32::INFINITY;
    for tick in ticks_inside(axis) {
        let y = vertical(&area, axis, tick.at);
        let points = vec![
            Point {
                x: area.left - TICK,
                y,
            },
            Point { x: area.left, y },
        ];
        items.push(Item::Line {
            points,
            stroke: Stroke::solid(pencil.style.figure.axis, 0.6),
        });
        let at = Point {
            x: area.left - TICK - 3.0,
            y: y + size * 0.33,
        };
        let text = pencil.text(&tick.label, size, at, Anchor::End);
        // Ticks ascend, so labels climb: one that would touch the label below it is left out.
        if text.area().bottom <= lowest_free {
            lowest_free = text.area().top - 0.5;
            items.push(Item::Text(text));
        }
    }

    let title_size = pencil.style.figure.title_pt;
    let room = area.bottom - area.top + PANEL_GAP - 4.0;
    let natural = pencil
        .faces
        .label_width(&axis.title, title_size, false)
        .max(1.0);
    let fitting = title_size * (room / natural).min(1.0);
    let middle = Point {
        x: title_size * 0.8,
        y: (area.top + area.bottom) / 2.0,
    };
    let mut title = pencil.text(&axis.title, fitting, middle, Anchor::Middle);
    title.upwards = true;
    items.push(Item::Text(title));

    for curve in &frame.curves {
        let style = pencil.style.line(frame.panel.series[curve.series].style);
        for at in &curve.markers {
            items.push(marker(*at, style));
        }
    }
}

/// Ticks, tick labels and title of the common abscissa below the lowest panel; returns the height of the figure.
pub fn abscissa(plot: &Plot, area: Area, pencil: &Pencil<'_>, items: &mut Vec<Item>) -> f32 {
    let size = pencil.label_size();
    let mut free_from = f32::NEG_INFINITY;
    let baseline = area.bottom + TICK + 3.0 + size * 0.7;
    for tick in ticks_inside(&plot.x) {
        let x = horizontal(&area, &plot.x, tick.at);
        let points = vec![
            Point { x, y: area.bottom },
            Point {
                x,
                y: area.bottom + TICK,
            },
        ];
        items.push(Item::Line {
            points,
            stroke: Stroke::solid(pencil.style.figure.axis, 0.6),
        });
        let text = pencil.text(&tick.label, size, Point { x, y: baseline }, Anchor::Middle);
        if text.area().left >= free_from {
            free_from = text.area().right + 4.0;
            items.push(Item::Text(text));
        }
    }
    let title_size = pencil.style.figure.title_pt;
    let at = Point {
        x: (area.left + area.right) / 2.0,
        y: baseline + 5.0 + title_size,
    };
    items.push(Item::Text(pencil.text(
        &plot.x.title,
        title_size,
        at,
        Anchor::Middle,
    )));
    at.y + title_size * 0.3
}

fn ticks_inside(axis: &Axis) -> impl Iterator<Item = &crate::record::block::Tick> {
    // Rounding of a logarithmic end must not lose the tick that stands on it.
    let slack = if axis.scale == Scale::Linear {
        (axis.high - axis.low) * 1e-9
    } else {
        axis.low * 1e-9
    };
    axis.ticks.iter().filter(move |tick| {
        tick.at >= axis.low - slack && tick.at <= axis.high * (1.0 + 1e-12) + slack
    })
}

/// The marker of a line style, about four points across.
pub fn marker(at: Point, style: &LineStyle) -> Item {
    let p = |dx: f32, dy: f32| Point {
        x: at.x + dx,
        y: at.y + dy,
    };
    let polygon = |points: Vec<Point>| Item::Polygon {
        points,
        fill: style.colour,
    };
    match style.marker {
        Marker::Disc => Item::Path {
            segments: circle(at, 2.1),
            fill: Some(Fill {
                colour: style.colour,
                even_odd: false,
            }),
            stroke: None,
        },
        Marker::Ring => Item::Path {
            segments: circle(at, 2.0),
            fill: None,
            stroke: Some(Stroke::solid(style.colour, 0.9)),
        },
        Marker::Square => polygon(vec![p(-1.9, -1.9), p(1.9, -1.9), p(1.9, 1.9), p(-1.9, 1.9)]),
        Marker::Triangle => polygon(vec![p(0.0, -2.6), p(2.4, 1.7), p(-2.4, 1.7)]),
        Marker::Diamond => polygon(vec![p(0.0, -2.7), p(2.4, 0.0), p(0.0, 2.7), p(-2.4, 0.0)]),
        Marker::Cross => Item::Path {
            segments: vec![
                Segment::Move(p(-1.9, -1.9)),
                Segment::Line(p(1.9, 1.9)),
                Segment::Move(p(-1.9, 1.9)),
                Segment::Line(p(1.9, -1.9)),
            ],
            fill: None,
            stroke: Some(Stroke::solid(style.colour, 0.9)),
        },
    }
}

fn circle(at: Point, radius: f32) -> Vec<Segment> {
    // Four cubic arcs; 0.5523 is 4(√2 − 1)/3, the usual handle length.
    let (r, k) = (radius, radius * 0.5523);
    let p = |dx: f32, dy: f32| Point {
        x: at.x + dx,
        y: at.y + dy,
    };
    vec![
        Segment::Move(p(r, 0.0)),
        Segment::Curve(p(r, k), p(k, r), p(0.0, r)),
        Segment::Curve(p(-k, r), p(-r, k), p(-r, 0.0)),
        Segment::Curve(p(-r, -k), p(-k, -r), p(0.0, -r)),
        Segment::Curve(p(k, -r), p(r, -k), p(r, 0.0)),
        Segment::Close,
    ]
}
