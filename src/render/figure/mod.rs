//! Plots: from a plot's data to a scene.
//!
//! Owns: where panels, axes, curves and labels stand. Does not own: ticks, label texts or ranges, which the
//! record has decided.

mod axes;
mod backend;
mod curve;
mod flags;
mod labels;

use super::PlotFault;
use super::face::Faces;
use super::scene::{Anchor, Area, Cap, Item, Point, Scene, Stroke, Text};
use super::style::PageStyle;
use crate::float;
use crate::record::block::{Axis, Label, Panel, Plot, Scale};
use curve::{Curve, clipped_curves};

/// Draws a plot as wide as the text block.
///
/// # Errors
/// [`PlotFault`] for a plot without panels or with an axis that spans nothing.
pub fn draw(plot: &Plot, faces: &Faces, style: &PageStyle) -> Result<Scene, PlotFault> {
    if plot.panels.is_empty() {
        return Err(PlotFault::NoPanel);
    }
    let axes = std::iter::once(&plot.x).chain(plot.panels.iter().map(|panel| &panel.y));
    if !axes.into_iter().all(usable) {
        return Err(PlotFault::Range);
    }
    let pencil = Pencil { faces, style };
    // A legend that finds no free place inside its panel goes above it, which moves everything below: lay out anew.
    let mut above = vec![false; plot.panels.len()];
    loop {
        let (scene, crowded) = compose(plot, &pencil, &above);
        let news = crowded
            .iter()
            .zip(&above)
            .any(|(crowded, above)| *crowded && !*above);
        if !news {
            return Ok(scene);
        }
        above = crowded;
    }
}

/// What measures and styles text in a figure.
struct Pencil<'a> {
    faces: &'a Faces,
    style: &'a PageStyle,
}

impl Pencil<'_> {
    fn text(&self, label: &Label, size: f32, at: Point, anchor: Anchor) -> Text {
        let width = self.faces.label_width(label, size, false);
        Text {
            at,
            anchor,
            size,
            colour: self.style.colour.ink,
            strong: false,
            upwards: false,
            label: label.clone(),
            width,
        }
    }

    fn label_size(&self) -> f32 {
        self.style.figure.label_pt
    }
}

/// One panel in its place.
struct Frame<'a> {
    panel: &'a Panel,
    area: Area,
    curves: Vec<Curve>,
    /// Labels of instants that no panel above already shows.
    instants: flags::Flags,
}

const TOP: f32 = 5.0;
const RIGHT: f32 = 9.0;
const TICK: f32 = 3.0;
const PANEL_GAP: f32 = 16.0;
const LEGEND_ROW: f32 = 12.0;

fn compose(plot: &Plot, pencil: &Pencil<'_>, legend_above: &[bool]) -> (Scene, Vec<bool>) {
    let style = pencil.style;
    let left = axes::gutter(plot, pencil);
    let overhang = plot.x.ticks.last().map_or(0.0, |tick| {
        pencil
            .faces
            .label_width(&tick.label, pencil.label_size(), false)
            / 2.0
    });
    let right = style.measure() - RIGHT.max(overhang + 1.0);
    let height = if plot.panels.len() == 1 {
        style.figure.single_panel_height_pt
    } else {
        style.figure.panel_height_pt
    };

    let mut frames = Vec::new();
    let mut y = TOP;
    for (i, panel) in plot.panels.iter().enumerate() {
        let seen = &plot.panels[..i];
        let fresh = |mark: &&crate::record::block::Mark| {
            !seen.iter().any(|p| {
                p.instants
                    .iter()
                    .any(|m| m.at == mark.at && m.label == mark.label)
            })
        };
        let marks: Vec<_> = panel.instants.iter().filter(fresh).collect();
        let flags = flags::flags(&marks, &plot.x, left, right, pencil);
        y += flags.height;
        if legend_above[i] {
            y += labels::legend_rows(panel, right - left, pencil) as f32 * LEGEND_ROW + 3.0;
        }
        let area = Area {
            left,
            top: y,
            right,
            bottom: y + height,
        };
        frames.push(Frame {
            panel,
            area,
            curves: clipped_curves(panel, &plot.x, area),
            instants: flags,
        });
        y = area.bottom + PANEL_GAP;
    }
    let bottom = y - PANEL_GAP;

    let mut items = Vec::new();
    backend::grid_and_curves(plot, &frames, style, &mut items);
    for frame in &frames {
        axes::frame(frame, pencil, &mut items);
    }
    let end = axes::abscissa(
        plot,
        Area {
            left,
            top: TOP,
            right,
            bottom,
        },
        pencil,
        &mut items,
    );
    let mut crowded = Vec::new();
    for (i, frame) in frames.iter().enumerate() {
        crowded.push(labels::place(
            plot,
            frame,
            legend_above[i],
            pencil,
            &mut items,
        ));
    }
    (
        Scene {
            width: style.measure(),
            height: end,
            items,
        },
        crowded,
    )
}

fn usable(axis: &Axis) -> bool {
    let finite = axis.low.is_finite() && axis.high.is_finite() && axis.low < axis.high;
    finite && (axis.scale == Scale::Linear || axis.low > 0.0)
}

/// Place of a value on its axis: 0 at the low end, 1 at the high end.
fn fraction(axis: &Axis, value: f64) -> f64 {
    match axis.scale {
        Scale::Linear => (value - axis.low) / (axis.high - axis.low),
        Scale::Logarithmic => {
            let low = float::log10(axis.low);
            (float::log10(value) - low) / (float::log10(axis.high) - low)
        }
    }
}

fn horizontal(area: &Area, axis: &Axis, value: f64) -> f32 {
    area.left + (area.right - area.left) * fraction(axis, value) as f32
}

fn vertical(area: &Area, axis: &Axis, value: f64) -> f32 {
    area.bottom - (area.bottom - area.top) * fraction(axis, value) as f32
}

fn stroke_of(style: &PageStyle, index: usize) -> Stroke {
    let line = style.line(index);
    let cap = if line.dash_pt.is_empty() {
        Cap::Round
    } else {
        Cap::Butt
    };
    Stroke {
        colour: line.colour,
        width: line.width_pt,
        dash: line.dash_pt.clone(),
        cap,
    }
}

fn is_blank(label: &Label) -> bool {
    label.0.iter().all(|run| run.text.trim().is_empty())
}

/// Texts of a scene with the space that they take up.
pub fn text_areas(scene: &Scene) -> Vec<(Area, String)> {
    let name = |label: &Label| {
        label
            .0
            .iter()
            .map(|run| run.text.as_str())
            .collect::<String>()
    };
    scene
        .items
        .iter()
        .filter_map(|item| match item {
            Item::Text(text) => Some((text.area(), name(&text.label))),
            _ => None,
        })
        .collect()
}
