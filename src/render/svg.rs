//! Scenes as SVG text: plain elements, no scripts, no links, the same bytes for the same scene.

use std::fmt::Write;

use super::face::{shift_rise, shift_scale};
use super::scene::{Anchor, Cap, Item, Point, Scene, Segment, Stroke, Text};
use super::style::Rgb;

/// Names of the face in the order in which a viewer should look for it.
const FAMILIES: &str =
    "'Source Sans 3', 'Source Sans Pro', 'Noto Sans', 'Helvetica Neue', Arial, sans-serif";

/// The scene as a standalone SVG 1.1 file; one unit is one point.
pub fn write(scene: &Scene) -> String {
    let mut out = String::new();
    let (width, height) = (number(scene.width), number(scene.height));
    out.push_str("<svg xmlns=\"http://www.w3.org/2000/svg\" ");
    push(
        &mut out,
        format_args!(
            "width=\"{width}pt\" height=\"{height}pt\" viewBox=\"0 0 {width} {height}\" font-family=\"{FAMILIES}\">\n"
        ),
    );
    push(
        &mut out,
        format_args!("<rect width=\"{width}\" height=\"{height}\" fill=\"#ffffff\"/>\n"),
    );
    let mut clips = 0;
    items(&mut out, &scene.items, &mut clips);
    out.push_str("</svg>\n");
    out
}

fn items(out: &mut String, list: &[Item], clips: &mut usize) {
    for item in list {
        match item {
            Item::Line { points, stroke } => {
                let points: Vec<String> = points.iter().map(pair).collect();
                push(
                    out,
                    format_args!(
                        "<polyline points=\"{}\" fill=\"none\"{}/>\n",
                        points.join(" "),
                        pen(stroke)
                    ),
                );
            }
            Item::Polygon { points, fill } => {
                let points: Vec<String> = points.iter().map(pair).collect();
                push(
                    out,
                    format_args!(
                        "<polygon points=\"{}\" fill=\"{}\"/>\n",
                        points.join(" "),
                        colour(*fill)
                    ),
                );
            }
            Item::Path {
                segments,
                fill,
                stroke,
            } => {
                let paint = fill.map_or_else(
                    || " fill=\"none\"".to_owned(),
                    |f| {
                        format!(
                            " fill=\"{}\"{}",
                            colour(f.colour),
                            if f.even_odd {
                                " fill-rule=\"evenodd\""
                            } else {
                                ""
                            }
                        )
                    },
                );
                let line = stroke.as_ref().map(pen).unwrap_or_default();
                push(
                    out,
                    format_args!("<path d=\"{}\"{paint}{line}/>\n", path(segments)),
                );
            }
            Item::Text(label) => text(out, label),
            Item::Clipped {
                clip,
                even_odd,
                items: inner,
            } => {
                *clips += 1;
                let id = *clips;
                let rule = if *even_odd {
                    " clip-rule=\"evenodd\""
                } else {
                    ""
                };
                push(
                    out,
                    format_args!(
                        "<clipPath id=\"clip{id}\"><path d=\"{}\"{rule}/></clipPath>\n",
                        path(clip)
                    ),
                );
                push(out, format_args!("<g clip-path=\"url(#clip{id})\">\n"));
                items(out, inner, clips);
                out.push_str("</g>\n");
            }
        }
    }
}

fn text(out: &mut String, label: &Text) {
    let anchor = match label.anchor {
        Anchor::Start => "start",
        Anchor::Middle => "middle",
        Anchor::End => "end",
    };
    let (x, y) = (number(label.at.x), number(label.at.y));
    let turn = if label.upwards {
        format!(" transform=\"rotate(-90 {x} {y})\"")
    } else {
        String::new()
    };
    let weight = if label.strong {
        " font-weight=\"600\""
    } else {
        ""
    };
    push(
        out,
        format_args!(
            "<text x=\"{x}\" y=\"{y}\" font-size=\"{}\" text-anchor=\"{anchor}\" fill=\"{}\"{weight}{turn} xml:space=\"preserve\">",
            number(label.size),
            colour(label.colour)
        ),
    );
    // `dy` accumulates: each run undoes the shift of the one before.
    let mut rise = 0.0;
    for run in &label.label.0 {
        let wanted = shift_rise(run.shift) * label.size;
        let mut attributes = String::new();
        if wanted != rise {
            push(
                &mut attributes,
                format_args!(" dy=\"{}\"", number(rise - wanted)),
            );
        }
        if shift_scale(run.shift) != 1.0 {
            push(
                &mut attributes,
                format_args!(
                    " font-size=\"{}\"",
                    number(label.size * shift_scale(run.shift))
                ),
            );
        }
        if run.italic {
            attributes.push_str(" font-style=\"italic\"");
        }
        rise = wanted;
        let shown = escaped(&super::face::printable(&run.text));
        match attributes.is_empty() {
            true => out.push_str(&shown),
            false => push(out, format_args!("<tspan{attributes}>{shown}</tspan>")),
        }
    }
    out.push_str("</text>\n");
}

fn pen(stroke: &Stroke) -> String {
    let mut out = format!(
        " stroke=\"{}\" stroke-width=\"{}\"",
        colour(stroke.colour),
        number(stroke.width)
    );
    if !stroke.dash.is_empty() {
        let dash: Vec<String> = stroke.dash.iter().map(|d| number(*d)).collect();
        push(
            &mut out,
            format_args!(" stroke-dasharray=\"{}\"", dash.join(" ")),
        );
    }
    match stroke.cap {
        Cap::Butt => {}
        Cap::Round => out.push_str(" stroke-linecap=\"round\" stroke-linejoin=\"round\""),
        Cap::Square => out.push_str(" stroke-linecap=\"square\""),
    }
    out
}

fn path(segments: &[Segment]) -> String {
    let parts: Vec<String> = segments
        .iter()
        .map(|segment| match segment {
            Segment::Move(p) => format!("M{}", pair(p)),
            Segment::Line(p) => format!("L{}", pair(p)),
            Segment::Curve(a, b, p) => format!("C{} {} {}", pair(a), pair(b), pair(p)),
            Segment::Close => "Z".to_owned(),
        })
        .collect();
    parts.join(" ")
}

fn pair(point: &Point) -> String {
    format!("{},{}", number(point.x), number(point.y))
}

/// At most two decimals, without trailing zeros.
fn number(value: f32) -> String {
    let hundredths = (f64::from(value) * 100.0).round() as i64;
    let sign = if hundredths < 0 { "-" } else { "" };
    let (whole, rest) = (hundredths.abs() / 100, hundredths.abs() % 100);
    match rest {
        0 => format!("{sign}{whole}"),
        r if r % 10 == 0 => format!("{sign}{whole}.{}", r / 10),
        r => format!("{sign}{whole}.{r:02}"),
    }
}

fn colour(Rgb(red, green, blue): Rgb) -> String {
    format!("#{red:02x}{green:02x}{blue:02x}")
}

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
        .replace('"', "&quot;")
}

fn push(out: &mut String, text: std::fmt::Arguments<'_>) {
    // Writing to a string cannot fail.
    let _ = out.write_fmt(text);
}
