//! Formulas on the page: layout by the mathematics face, breaks of over-wide displays, marks.

use super::strip::{Drawn, Glyphs};
use crate::formula::typeset::Math;
use crate::render::RenderError;
use crate::render::face::{FaceId, Faces, Glyph};
use crate::render::math::{to_mathml, to_mathml_display, to_plain};
use crate::render::scene::Area;
use crate::render::style::Rgb;

/// Lays out one formula at a size in points.
///
/// # Errors
/// [`RenderError::Formula`] if the layout does not understand the expression.
pub fn lay_out(
    math: &Math,
    size: f32,
    display: bool,
    faces: &Faces,
) -> Result<formulary::Layout, RenderError> {
    let markup = if display {
        to_mathml_display(math)
    } else {
        to_mathml(math)
    };
    let refused = || RenderError::Formula(to_plain(math));
    let tree = formulary::parse(&markup).map_err(|_| refused())?;
    if !tree.warnings.is_empty() {
        return Err(refused());
    }
    let layout = formulary::layout(
        &tree,
        faces.math(),
        &formulary::LayoutOptions { font_size: size },
    );
    note_missing(math, faces);
    Ok(layout)
}

/// The marks of a laid-out formula with its baseline origin at (x, baseline).
pub fn marks(layout: &formulary::Layout, x: f32, baseline: f32, colour: Rgb) -> Vec<Drawn> {
    let mut marks = Vec::new();
    for item in &layout.items {
        match item {
            formulary::Item::Glyph {
                id,
                x: dx,
                y: dy,
                size,
                advance,
                ..
            } => {
                let glyph = Glyph {
                    id: id.0,
                    advance: advance * 1000.0 / size,
                    dx: 0.0,
                    dy: 0.0,
                    text: String::new(),
                };
                marks.push(Drawn::Glyphs(Glyphs {
                    face: FaceId::Math,
                    size: *size,
                    x: x + dx,
                    baseline: baseline + dy,
                    colour,
                    glyphs: vec![glyph],
                    stretch: 0.0,
                    upwards: false,
                }));
            }
            formulary::Item::Rule {
                x: dx, y: dy, w, h, ..
            } => {
                let (left, top) = (x + dx, baseline + dy);
                marks.push(Drawn::Fill {
                    area: Area {
                        left,
                        top,
                        right: left + w,
                        bottom: top + h,
                    },
                    colour,
                });
            }
            _ => {}
        }
    }
    marks
}

/// A displayed formula in one or more lines.
pub struct Display {
    /// Layouts with their indent.
    pub lines: Vec<(f32, formulary::Layout)>,
}

const CONTINUATION: f32 = 22.0;
/// A formula may shrink to this much of its size before it breaks.
const SHRINK: f32 = 0.88;

/// Fits a display into a width: at its size, a little smaller, broken at operators, or as small as it must be.
///
/// # Errors
/// As [`lay_out`].
pub fn display(math: &Math, size: f32, width: f32, faces: &Faces) -> Result<Display, RenderError> {
    let whole = lay_out(math, size, true, faces)?;
    if whole.width <= width {
        return Ok(Display {
            lines: vec![(0.0, whole)],
        });
    }
    if whole.width * SHRINK <= width {
        let smaller = lay_out(math, size * width / whole.width, true, faces)?;
        return Ok(Display {
            lines: vec![(0.0, smaller)],
        });
    }
    let mut parts = Vec::new();
    for segment in segments(math) {
        // A part that is wider than a line by itself may break between any two of its factors.
        let wide = lay_out(&joined(std::slice::from_ref(&segment)), size, true, faces)?.width;
        if wide > width - CONTINUATION {
            parts.extend(segment.into_iter().map(|factor| vec![factor]));
        } else {
            parts.push(segment);
        }
    }
    let mut lines: Vec<(f32, formulary::Layout)> = Vec::new();
    let mut start = 0;
    while start < parts.len() {
        let indent = if start == 0 { 0.0 } else { CONTINUATION };
        let room = width - indent;
        let mut end = start + 1;
        let mut line = lay_out(&joined(&parts[start..end]), size, true, faces)?;
        while end < parts.len() {
            let longer = lay_out(&joined(&parts[start..end + 1]), size, true, faces)?;
            if longer.width > room {
                break;
            }
            line = longer;
            end += 1;
        }
        if line.width > room {
            line = lay_out(
                &joined(&parts[start..end]),
                size * room / line.width,
                true,
                faces,
            )?;
        }
        lines.push((indent, line));
        start = end;
    }
    Ok(Display { lines })
}

/// Parts of an inline formula between which a line may break: after relations at its top level.
pub fn split_inline(math: &Math) -> Vec<Math> {
    let Math::Row(parts) = math else {
        return vec![math.clone()];
    };
    if parts.len() < 5 {
        return vec![math.clone()];
    }
    let mut pieces: Vec<Vec<Math>> = vec![Vec::new()];
    for (i, part) in parts.iter().enumerate() {
        let relation = matches!(part, Math::Operator(sign) if is_relation(sign));
        if let Some(last) = pieces.last_mut() {
            last.push(part.clone());
        }
        if relation && i > 0 && i + 1 < parts.len() {
            pieces.push(Vec::new());
        }
    }
    pieces.into_iter().map(Math::Row).collect()
}

/// Parts of a display, each beginning with the operator that joins it to the part before.
fn segments(math: &Math) -> Vec<Vec<Math>> {
    let Math::Row(parts) = math else {
        return vec![vec![math.clone()]];
    };
    let mut segments: Vec<Vec<Math>> = vec![Vec::new()];
    for (i, part) in parts.iter().enumerate() {
        let sign = match part {
            Math::Operator(sign) => sign.as_str(),
            Math::Quad => "quad",
            _ => "",
        };
        let after_matter = i > 0 && !matches!(parts[i - 1], Math::Operator(_) | Math::Quad);
        let breaks = sign == "quad"
            || after_matter && (is_relation(sign) || matches!(sign, "+" | "−" | "-" | "±"));
        let empty = segments.last().is_some_and(Vec::is_empty);
        if breaks && !empty {
            segments.push(Vec::new());
        }
        if let Some(last) = segments.last_mut() {
            last.push(part.clone());
        }
    }
    segments
}

fn joined(segments: &[Vec<Math>]) -> Math {
    let mut parts: Vec<Math> = segments.concat();
    // A space that opened a line has done its work.
    while parts.first() == Some(&Math::Quad) {
        parts.remove(0);
    }
    // An operator that joins this line to the line before is no sign: an empty part on its left tells so.
    if matches!(parts.first(), Some(Math::Operator(_))) {
        parts.insert(0, Math::Row(Vec::new()));
    }
    Math::Row(parts)
}

fn is_relation(sign: &str) -> bool {
    matches!(
        sign,
        "=" | "<" | ">" | "≤" | "≥" | "≠" | "≈" | "≡" | "∝" | "→" | "⇒" | "∈"
    )
}

fn note_missing(math: &Math, faces: &Faces) {
    let check = |text: &str| {
        for character in crate::render::face::printable(text).chars() {
            if !character.is_whitespace() && !faces.has(FaceId::Math, character) {
                faces.note_missing(character);
            }
        }
    };
    match math {
        Math::Row(parts) => parts.iter().for_each(|part| note_missing(part, faces)),
        Math::Symbol(text) | Math::Upright(text) | Math::Number(text) | Math::Operator(text) => {
            check(text)
        }
        Math::Fraction(a, b) | Math::Superscript(a, b) | Math::Subscript(a, b) => {
            note_missing(a, faces);
            note_missing(b, faces);
        }
        Math::Root { radicand, degree } => {
            note_missing(radicand, faces);
            degree.iter().for_each(|degree| note_missing(degree, faces));
        }
        Math::Fenced { open, close, body } => {
            check(&open.to_string());
            check(&close.to_string());
            note_missing(body, faces);
        }
        Math::Cases(cases) => cases.iter().for_each(|(value, condition)| {
            note_missing(value, faces);
            note_missing(condition, faces);
        }),
        Math::Quad => {}
    }
}
