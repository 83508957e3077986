//! Labels inside a panel: levels and curves where they cover nothing, else a legend.

use super::{Frame, LEGEND_ROW, Pencil, axes, flags, horizontal, is_blank, stroke_of, vertical};
use crate::record::block::{Label, Panel, Plot};
use crate::render::scene::{Anchor, Area, Item, Point, Text};
use crate::render::style::Rgb;

/// Rows that a legend above the panel takes.
pub fn legend_rows(panel: &Panel, width: f32, pencil: &Pencil<'_>) -> usize {
    legend_entries(panel, pencil)
        .iter()
        .fold((1, 0.0), |(rows, x), entry| {
            if x > 0.0 && x + entry.width > width {
                (rows + 1, entry.width)
            } else {
                (rows, x + entry.width)
            }
        })
        .0
}

/// Sets all labels of a panel; returns whether its legend found no free place inside.
pub fn place(
    plot: &Plot,
    frame: &Frame<'_>,
    legend_above: bool,
    pencil: &Pencil<'_>,
    items: &mut Vec<Item>,
) -> bool {
    flags::set(frame, pencil, items);
    let mut taken = obstacles(plot, frame);
    set_levels(frame, pencil, &mut taken, items);
    if legend_above {
        set_legend_above(frame, pencil, items);
        return true;
    }
    if let Some(texts) = direct_labels(frame, pencil, &taken) {
        items.extend(texts.into_iter().map(Item::Text));
        return false;
    }
    match legend_inside(frame, pencil, &taken) {
        Some(legend) => {
            items.extend(legend);
            false
        }
        None => true,
    }
}

/// What a label must not cover.
struct Taken {
    lines: Vec<(Point, Point)>,
    areas: Vec<Area>,
}

impl Taken {
    fn hits(&self, area: &Area) -> usize {
        let near = area.grown(1.5);
        self.lines
            .iter()
            .filter(|(a, b)| near.meets(*a, *b))
            .count()
            + 10 * self
                .areas
                .iter()
                .filter(|other| other.overlaps(&near))
                .count()
    }
}

fn obstacles(plot: &Plot, frame: &Frame<'_>) -> Taken {
    let area = frame.area;
    let mut lines: Vec<(Point, Point)> = frame
        .curves
        .iter()
        .flat_map(|curve| curve.segments())
        .collect();
    for level in &frame.panel.levels {
        let y = vertical(&area, &frame.panel.y, level.at);
        lines.push((Point { x: area.left, y }, Point { x: area.right, y }));
    }
    for instant in &frame.panel.instants {
        let x = horizontal(&area, &plot.x, instant.at);
        lines.push((Point { x, y: area.top }, Point { x, y: area.bottom }));
    }
    let marker = |p: &Point| {
        Area {
            left: p.x,
            top: p.y,
            right: p.x,
            bottom: p.y,
        }
        .grown(2.5)
    };
    let areas = frame
        .curves
        .iter()
        .flat_map(|curve| curve.markers.iter().map(marker))
        .collect();
    Taken { lines, areas }
}

fn set_levels(frame: &Frame<'_>, pencil: &Pencil<'_>, taken: &mut Taken, items: &mut Vec<Item>) {
    let area = frame.area;
    for level in &frame.panel.levels {
        let y = vertical(&area, &frame.panel.y, level.at);
        if is_blank(&level.label) || y < area.top - 0.01 || y > area.bottom + 0.01 {
            continue;
        }
        let size = pencil.label_size();
        let places = [
            (area.right - 4.0, Anchor::End),
            (area.left + 4.0, Anchor::Start),
            ((area.left + area.right) / 2.0, Anchor::Middle),
        ];
        let (above, below) = (y - 2.8, y + size * 0.7 + 2.8);
        let candidates = places
            .iter()
            .flat_map(|(x, anchor)| [(*x, above, *anchor), (*x, below, *anchor)]);
        let texts = candidates
            .map(|(x, y, anchor)| pencil.text(&level.label, size, Point { x, y }, anchor));
        let inside = texts.filter(|text| area.holds(&text.area()));
        if let Some(mut text) = inside.min_by_key(|text| taken.hits(&text.area())) {
            text.colour = pencil.style.figure.mark;
            if taken.hits(&text.area()) > 0 {
                // Nowhere is free: the curve gives way behind the words.
                items.push(Item::Polygon {
                    points: corner_points(&text.area().grown(1.0)),
                    fill: Rgb(255, 255, 255),
                });
            }
            taken.areas.push(text.area());
            items.push(Item::Text(text));
        }
    }
}

/// One label beside each curve, in its colour; nothing if any of them finds no free place.
fn direct_labels(frame: &Frame<'_>, pencil: &Pencil<'_>, taken: &Taken) -> Option<Vec<Text>> {
    let mut placed: Vec<Text> = Vec::new();
    for curve in &frame.curves {
        let series = &frame.panel.series[curve.series];
        if is_blank(&series.label) {
            continue;
        }
        let colour = pencil.style.line(series.style).colour;
        let text = beside(frame, curve, &series.label, colour, pencil, taken, &placed)?;
        placed.push(text);
    }
    Some(placed)
}

fn beside(
    frame: &Frame<'_>,
    curve: &super::Curve,
    label: &Label,
    colour: Rgb,
    pencil: &Pencil<'_>,
    taken: &Taken,
    placed: &[Text],
) -> Option<Text> {
    let size = pencil.label_size();
    let spots = spots_along(curve);
    let free = |text: &Text| {
        let area = text.area();
        let clear = taken.hits(&area) == 0
            && placed
                .iter()
                .all(|other| !other.area().overlaps(&area.grown(3.0)));
        clear && frame.area.holds(&area.grown(2.0)) && nearest_is_own(frame, curve, &area)
    };
    for distance in [4.0, 7.0, 11.0] {
        for spot in &spots {
            for (dx, anchor) in [
                (0.0, Anchor::Middle),
                (3.0, Anchor::Start),
                (-3.0, Anchor::End),
            ] {
                for y in [spot.y - distance, spot.y + distance + size * 0.62] {
                    let mut text = pencil.text(label, size, Point { x: spot.x + dx, y }, anchor);
                    text.colour = colour;
                    if free(&text) {
                        return Some(text);
                    }
                }
            }
        }
    }
    None
}

/// Points of a curve at which a label may stand: from near its right end to its left.
fn spots_along(curve: &super::Curve) -> Vec<Point> {
    let segments: Vec<(Point, Point)> = match curve.pieces.is_empty() {
        true => curve
            .markers
            .windows(2)
            .map(|pair| (pair[0], pair[1]))
            .collect(),
        false => curve.segments().collect(),
    };
    let (Some(first), Some(last)) = (segments.first(), segments.last()) else {
        return curve.markers.clone();
    };
    let (from, to) = (first.0.x, last.1.x);
    let at = |x: f32| {
        let segment = segments
            .iter()
            .find(|(a, b)| a.x.min(b.x) <= x && x <= a.x.max(b.x))?;
        let (a, b) = *segment;
        let t = if (b.x - a.x).abs() < 1e-6 {
            0.0
        } else {
            (x - a.x) / (b.x - a.x)
        };
        Some(Point {
            x,
            y: a.y + t * (b.y - a.y),
        })
    };
    (0..=36)
        .filter_map(|i| at(to - (to - from) * (0.04 + 0.92 * i as f32 / 36.0)))
        .collect()
}

/// A label must not stand nearer to another curve than to its own.
fn nearest_is_own(frame: &Frame<'_>, own: &super::Curve, area: &Area) -> bool {
    let distance = |curve: &super::Curve| {
        [2.0, 4.0, 6.0, 9.0, 13.0, 18.0].iter().position(|d| {
            let grown = area.grown(*d);
            curve.segments().any(|(a, b)| grown.meets(a, b))
                || curve.markers.iter().any(|m| grown.meets(*m, *m))
        })
    };
    let rank = |found: Option<usize>| found.unwrap_or(usize::MAX);
    let mine = rank(distance(own));
    frame
        .curves
        .iter()
        .filter(|other| other.series != own.series)
        .all(|other| rank(distance(other)) > mine)
}

struct Entry {
    label: Label,
    style: usize,
    line: bool,
    markers: bool,
    width: f32,
}

const SAMPLE: f32 = 22.0;

fn legend_entries(panel: &Panel, pencil: &Pencil<'_>) -> Vec<Entry> {
    let shown = panel
        .series
        .iter()
        .filter(|series| !is_blank(&series.label));
    shown
        .map(|series| Entry {
            label: series.label.clone(),
            style: series.style,
            line: series.line,
            markers: series.markers,
            width: SAMPLE
                + 5.0
                + pencil
                    .faces
                    .label_width(&series.label, pencil.label_size(), false)
                + 14.0,
        })
        .collect()
}

fn legend_inside(frame: &Frame<'_>, pencil: &Pencil<'_>, taken: &Taken) -> Option<Vec<Item>> {
    let entries = legend_entries(frame.panel, pencil);
    if entries.is_empty() {
        return Some(Vec::new());
    }
    let width = entries.iter().map(|entry| entry.width).fold(0.0, f32::max) - 4.0;
    let height = entries.len() as f32 * LEGEND_ROW + 4.0;
    let area = frame.area.grown(-5.0);
    let (spare_x, spare_y) = (
        area.right - area.left - width,
        area.bottom - area.top - height,
    );
    if spare_x < 0.0 || spare_y < 0.0 {
        return None;
    }
    let at = |i: usize, j: usize| {
        let (left, top) = (
            area.left + spare_x * i as f32 / 12.0,
            area.top + spare_y * j as f32 / 8.0,
        );
        Area {
            left,
            top,
            right: left + width,
            bottom: top + height,
        }
    };
    // Corners first, then the edges and the interior.
    let corners = [(12, 0), (12, 8), (0, 0), (0, 8)];
    let grid = (0..=8).flat_map(|j| (0..=12).rev().map(move |i| (i, j)));
    let place = corners
        .into_iter()
        .chain(grid)
        .map(|(i, j)| at(i, j))
        .find(|place| taken.hits(place) == 0)?;
    let mut items = vec![Item::Polygon {
        points: corner_points(&place),
        fill: Rgb(255, 255, 255),
    }];
    for (row, entry) in entries.iter().enumerate() {
        legend_entry(
            entry,
            place.left + 4.0,
            place.top + 2.0 + (row as f32 + 0.5) * LEGEND_ROW,
            pencil,
            &mut items,
        );
    }
    Some(items)
}

fn set_legend_above(frame: &Frame<'_>, pencil: &Pencil<'_>, items: &mut Vec<Item>) {
    let entries = legend_entries(frame.panel, pencil);
    let width = frame.area.right - frame.area.left;
    let rows = legend_rows(frame.panel, width, pencil);
    let top = frame.area.top - frame.instants.height - rows as f32 * LEGEND_ROW - 1.0;
    let (mut row, mut x) = (0, 0.0);
    for entry in &entries {
        if x > 0.0 && x + entry.width > width {
            row += 1;
            x = 0.0;
        }
        legend_entry(
            entry,
            frame.area.left + x,
            top + (row as f32 + 0.5) * LEGEND_ROW,
            pencil,
            items,
        );
        x += entry.width;
    }
}

fn legend_entry(entry: &Entry, x: f32, middle: f32, pencil: &Pencil<'_>, items: &mut Vec<Item>) {
    if entry.line {
        let points = vec![
            Point { x, y: middle },
            Point {
                x: x + SAMPLE,
                y: middle,
            },
        ];
        items.push(Item::Line {
            points,
            stroke: stroke_of(pencil.style, entry.style),
        });
    }
    if entry.markers {
        items.push(axes::marker(
            Point {
                x: x + SAMPLE / 2.0,
                y: middle,
            },
            pencil.style.line(entry.style),
        ));
    }
    let size = pencil.label_size();
    let at = Point {
        x: x + SAMPLE + 5.0,
        y: middle + size * 0.33,
    };
    items.push(Item::Text(pencil.text(
        &entry.label,
        size,
        at,
        Anchor::Start,
    )));
}

fn corner_points(area: &Area) -> Vec<Point> {
    let p = |x, y| Point { x, y };
    vec![
        p(area.left, area.top),
        p(area.right, area.top),
        p(area.right, area.bottom),
        p(area.left, area.bottom),
    ]
}
