//! Pictures brought by the user: SVG as a scene, PNG as pixels, JPEG passed on as it is.
//!
//! A picture file is untrusted: nothing outside it is read, and a fault in it is a value.

use std::io::Cursor;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use usvg::tiny_skia_path::{PathSegment, Transform};
use usvg::{FontFamily, fontdb};

use super::PictureFault;
use super::face::FaceId;
use super::scene::{Cap, Fill, Item, Point, Scene, Segment, Stroke};
use super::style::Rgb;

#[derive(Clone, Debug, PartialEq)]
pub enum Artwork {
    Vector(Scene),
    Raster(Raster),
}

#[derive(Clone, Debug, PartialEq)]
pub struct Raster {
    pub width: u32,
    pub height: u32,
    pub data: RasterData,
}

#[derive(Clone, Debug, PartialEq)]
pub enum RasterData {
    /// Three bytes a pixel, rows from the top, transparency already laid on white.
    Rgb(Vec<u8>),
    /// A complete JPEG file with this number of components (1 or 3).
    Jpeg { components: u8, file: Vec<u8> },
}

/// More pixels than this are beyond any page.
const PIXELS: u64 = 40_000_000;

/// Reads a picture file by what it contains, not by its name.
///
/// # Errors
/// [`PictureFault`] for damage, for another format, or for what print cannot keep.
pub fn read(bytes: &[u8]) -> Result<Artwork, PictureFault> {
    if bytes.starts_with(b"\x89PNG\r\n\x1a\n") {
        png(bytes).map(Artwork::Raster)
    } else if bytes.starts_with(&[0xff, 0xd8, 0xff]) {
        jpeg(bytes).map(Artwork::Raster)
    } else {
        let text = std::str::from_utf8(bytes).map_err(|_| PictureFault::UnknownKind)?;
        let text = text.trim_start_matches('\u{feff}');
        match text.trim_start().starts_with('<') {
            true => svg(text).map(Artwork::Vector),
            false => Err(PictureFault::UnknownKind),
        }
    }
}

fn png(bytes: &[u8]) -> Result<Raster, PictureFault> {
    let mut decoder = png::Decoder::new(Cursor::new(bytes));
    decoder.set_transformations(png::Transformations::normalize_to_color8());
    let mut reader = decoder
        .read_info()
        .map_err(|_| PictureFault::Damaged("PNG header"))?;
    let (width, height) = reader.info().size();
    checked_size(width, height)?;
    let length = reader.output_buffer_size().ok_or(PictureFault::Size)?;
    let mut buffer = vec![0; length];
    let frame = reader
        .next_frame(&mut buffer)
        .map_err(|_| PictureFault::Damaged("PNG pixels"))?;
    let pixels = &buffer[..frame.buffer_size().min(length)];
    let over_white = |value: u8, alpha: u8| {
        let (value, alpha) = (u32::from(value), u32::from(alpha));
        ((value * alpha + 255 * (255 - alpha) + 127) / 255) as u8
    };
    let rgb = match frame.color_type {
        png::ColorType::Rgb => pixels.to_vec(),
        png::ColorType::Grayscale => pixels.iter().flat_map(|g| [*g; 3]).collect(),
        png::ColorType::GrayscaleAlpha => pixels
            .chunks_exact(2)
            .flat_map(|p| [over_white(p[0], p[1]); 3])
            .collect(),
        png::ColorType::Rgba => pixels
            .chunks_exact(4)
            .flat_map(|p| {
                [
                    over_white(p[0], p[3]),
                    over_white(p[1], p[3]),
                    over_white(p[2], p[3]),
                ]
            })
            .collect(),
        png::ColorType::Indexed => return Err(PictureFault::Damaged("PNG palette")),
    };
    Ok(Raster {
        width,
        height,
        data: RasterData::Rgb(rgb),
    })
}

/// Reads the frame header of a JPEG file (ITU-T T.81, B.2.2); the data stay as they are.
fn jpeg(bytes: &[u8]) -> Result<Raster, PictureFault> {
    const DAMAGED: PictureFault = PictureFault::Damaged("JPEG header");
    let mut at = 2;
    loop {
        let marker = match bytes.get(at..at + 2) {
            Some([0xff, marker]) => *marker,
            _ => return Err(DAMAGED),
        };
        if marker == 0xff {
            at += 1;
            continue;
        }
        let length = match bytes.get(at + 2..at + 4) {
            Some([high, low]) => usize::from(*high) << 8 | usize::from(*low),
            _ => return Err(DAMAGED),
        };
        let body = bytes.get(at + 4..at + 2 + length).ok_or(DAMAGED)?;
        match marker {
            // Baseline, extended and progressive Huffman frames.
            0xc0..=0xc2 => {
                let [
                    8,
                    height_high,
                    height_low,
                    width_high,
                    width_low,
                    components,
                    ..,
                ] = body
                else {
                    return Err(PictureFault::Unsupported(
                        "JPEG samples of other than 8 bits",
                    ));
                };
                let height = u32::from(*height_high) << 8 | u32::from(*height_low);
                let width = u32::from(*width_high) << 8 | u32::from(*width_low);
                checked_size(width, height)?;
                if !matches!(components, 1 | 3) {
                    return Err(PictureFault::Unsupported(
                        "JPEG colours other than grey and RGB",
                    ));
                }
                if !bytes[bytes.len().saturating_sub(64)..]
                    .windows(2)
                    .any(|pair| pair == [0xff, 0xd9])
                {
                    return Err(PictureFault::Damaged("JPEG end"));
                }
                let data = RasterData::Jpeg {
                    components: *components,
                    file: bytes.to_vec(),
                };
                return Ok(Raster {
                    width,
                    height,
                    data,
                });
            }
            0xc3 | 0xc5..=0xc7 | 0xc9..=0xcb | 0xcd..=0xcf => {
                return Err(PictureFault::Unsupported("a rare JPEG coding"));
            }
            0xd9 | 0xda => return Err(DAMAGED),
            _ => at += 2 + length,
        }
    }
}

fn checked_size(width: u32, height: u32) -> Result<(), PictureFault> {
    let pixels = u64::from(width) * u64::from(height);
    if pixels == 0 || pixels > PIXELS {
        Err(PictureFault::Size)
    } else {
        Ok(())
    }
}

fn svg(text: &str) -> Result<Scene, PictureFault> {
    let external = Arc::new(AtomicBool::new(false));
    let embedded = Arc::new(AtomicBool::new(false));
    let (outside, inside) = (Arc::clone(&external), Arc::clone(&embedded));
    let options = usvg::Options {
        resources_dir: None,
        font_family: "Source Sans 3".to_owned(),
        fontdb: Arc::new(font_database()),
        font_resolver: usvg::FontResolver {
            select_font: Box::new(select_face),
            select_fallback: usvg::FontResolver::default_fallback_selector(),
        },
        image_href_resolver: usvg::ImageHrefResolver {
            resolve_data: Box::new(move |_, _, _| {
                inside.store(true, Ordering::Relaxed);
                None
            }),
            resolve_string: Box::new(move |_, _| {
                outside.store(true, Ordering::Relaxed);
                None
            }),
        },
        ..usvg::Options::default()
    };
    let tree = usvg::Tree::from_str(text, &options).map_err(|error| match error {
        usvg::Error::InvalidSize => PictureFault::Size,
        _ => PictureFault::Damaged("SVG text"),
    })?;
    if external.load(Ordering::Relaxed) {
        return Err(PictureFault::ExternalReference);
    }
    if embedded.load(Ordering::Relaxed) {
        return Err(PictureFault::Unsupported("pixel images inside SVG"));
    }
    let mut items = Vec::new();
    group(
        tree.root(),
        Transform::from_scale(POINTS_PER_PIXEL, POINTS_PER_PIXEL),
        1.0,
        &mut items,
    )?;
    let size = tree.size();
    Ok(Scene {
        width: size.width() * POINTS_PER_PIXEL,
        height: size.height() * POINTS_PER_PIXEL,
        items,
    })
}

/// CSS: 96 pixels an inch.
const POINTS_PER_PIXEL: f32 = 0.75;

fn font_database() -> fontdb::Database {
    let mut database = fontdb::Database::new();
    for face in FaceId::ALL.iter().filter(|face| **face != FaceId::Math) {
        database.load_font_source(fontdb::Source::Binary(Arc::new(face.program())));
    }
    database
}

/// Every family maps to one of ours: a picture may not lose its words for want of a font.
fn select_face(font: &usvg::Font, database: &mut Arc<fontdb::Database>) -> Option<fontdb::ID> {
    let named = |family: &FontFamily| match family {
        FontFamily::Serif => "serif".to_owned(),
        FontFamily::Monospace => "mono".to_owned(),
        FontFamily::Named(name) => name.to_lowercase(),
        _ => "sans".to_owned(),
    };
    let wanted = font.families().first().map(named).unwrap_or_default();
    let has = |words: &[&str]| words.iter().any(|word| wanted.contains(word));
    let family = if has(&["mono", "courier", "consol"]) {
        "IBM Plex Mono"
    } else if has(&["sans"]) {
        "Source Sans 3"
    } else if has(&["serif", "times", "roman", "georgia", "stix", "cambria"]) {
        "STIX Two Text"
    } else {
        "Source Sans 3"
    };
    let style = match font.style() {
        usvg::FontStyle::Normal => fontdb::Style::Normal,
        usvg::FontStyle::Italic | usvg::FontStyle::Oblique => fontdb::Style::Italic,
    };
    let weight = fontdb::Weight(font.weight());
    let query = |family, style| {
        database.query(&fontdb::Query {
            families: &[fontdb::Family::Name(family)],
            weight,
            stretch: fontdb::Stretch::Normal,
            style,
        })
    };
    query(family, style)
        .or_else(|| query(family, fontdb::Style::Normal))
        .or_else(|| database.faces().next().map(|face| face.id))
}

fn group(
    group: &usvg::Group,
    outer: Transform,
    opacity: f32,
    items: &mut Vec<Item>,
) -> Result<(), PictureFault> {
    if !group.filters().is_empty() {
        return Err(PictureFault::Unsupported("filters"));
    }
    if group.mask().is_some() {
        return Err(PictureFault::Unsupported("masks"));
    }
    if group.blend_mode() != usvg::BlendMode::Normal {
        return Err(PictureFault::Unsupported("blend modes"));
    }
    let transform = outer.pre_concat(group.transform());
    let opacity = opacity * group.opacity().get();
    let mut inner = Vec::new();
    for node in group.children() {
        match node {
            usvg::Node::Group(child) => self::group(child, transform, opacity, &mut inner)?,
            usvg::Node::Path(path) if path.is_visible() => {
                inner.push(drawn(path, transform, opacity)?)
            }
            usvg::Node::Path(_) => {}
            usvg::Node::Text(text) => {
                self::group(text.flattened(), transform, opacity, &mut inner)?
            }
            usvg::Node::Image(_) => {
                return Err(PictureFault::Unsupported("pixel images inside SVG"));
            }
        }
    }
    match group.clip_path() {
        None => items.append(&mut inner),
        Some(clip) => {
            if clip.clip_path().is_some() {
                return Err(PictureFault::Unsupported("nested clip paths"));
            }
            let (segments, even_odd) =
                outline(clip.root(), transform.pre_concat(clip.transform()))?;
            items.push(Item::Clipped {
                clip: segments,
                even_odd,
                items: inner,
            });
        }
    }
    Ok(())
}

/// All shapes of a clip path as one path.
fn outline(group: &usvg::Group, outer: Transform) -> Result<(Vec<Segment>, bool), PictureFault> {
    let transform = outer.pre_concat(group.transform());
    let mut all = Vec::new();
    let mut even_odd = false;
    for node in group.children() {
        match node {
            usvg::Node::Group(child) => {
                let (segments, rule) = outline(child, transform)?;
                all.extend(segments);
                even_odd |= rule;
            }
            usvg::Node::Path(path) => {
                all.extend(segments(path.data(), transform)?);
                even_odd |= path
                    .fill()
                    .is_some_and(|fill| fill.rule() == usvg::FillRule::EvenOdd);
            }
            _ => return Err(PictureFault::Unsupported("text as a clip path")),
        }
    }
    Ok((all, even_odd))
}

fn drawn(path: &usvg::Path, transform: Transform, opacity: f32) -> Result<Item, PictureFault> {
    let fill = match path.fill() {
        Some(fill) => Some(Fill {
            colour: flat(fill.paint(), fill.opacity().get() * opacity)?,
            even_odd: fill.rule() == usvg::FillRule::EvenOdd,
        }),
        None => None,
    };
    let stroke = match path.stroke() {
        Some(stroke) => {
            let scale = (transform.sx * transform.sy - transform.kx * transform.ky)
                .abs()
                .sqrt();
            Some(Stroke {
                colour: flat(stroke.paint(), stroke.opacity().get() * opacity)?,
                width: stroke.width().get() * scale,
                dash: stroke
                    .dasharray()
                    .unwrap_or(&[])
                    .iter()
                    .map(|d| d * scale)
                    .collect(),
                cap: match stroke.linecap() {
                    usvg::LineCap::Butt => Cap::Butt,
                    usvg::LineCap::Round => Cap::Round,
                    usvg::LineCap::Square => Cap::Square,
                },
            })
        }
        None => None,
    };
    Ok(Item::Path {
        segments: segments(path.data(), transform)?,
        fill,
        stroke,
    })
}

/// A flat colour, transparency laid on white: a page has no need of either.
fn flat(paint: &usvg::Paint, opacity: f32) -> Result<Rgb, PictureFault> {
    match paint {
        usvg::Paint::Color(colour) => {
            let over_white =
                |value: u8| (f32::from(value) * opacity + 255.0 * (1.0 - opacity)).round() as u8;
            Ok(Rgb(
                over_white(colour.red),
                over_white(colour.green),
                over_white(colour.blue),
            ))
        }
        usvg::Paint::LinearGradient(_) | usvg::Paint::RadialGradient(_) => {
            Err(PictureFault::Unsupported("colour gradients"))
        }
        usvg::Paint::Pattern(_) => Err(PictureFault::Unsupported("pattern fills")),
    }
}

fn segments(
    path: &usvg::tiny_skia_path::Path,
    transform: Transform,
) -> Result<Vec<Segment>, PictureFault> {
    let moved = path
        .clone()
        .transform(transform)
        .ok_or(PictureFault::Damaged("SVG path"))?;
    let p = |point: usvg::tiny_skia_path::Point| Point {
        x: point.x,
        y: point.y,
    };
    let mut last = Point { x: 0.0, y: 0.0 };
    let mut list = Vec::new();
    for segment in moved.segments() {
        match segment {
            PathSegment::MoveTo(to) => {
                last = p(to);
                list.push(Segment::Move(last));
            }
            PathSegment::LineTo(to) => {
                last = p(to);
                list.push(Segment::Line(last));
            }
            // A quadratic arc as the cubic arc that equals it.
            PathSegment::QuadTo(handle, to) => {
                let (h, to) = (p(handle), p(to));
                let third = |a: Point| Point {
                    x: a.x + (h.x - a.x) * 2.0 / 3.0,
                    y: a.y + (h.y - a.y) * 2.0 / 3.0,
                };
                list.push(Segment::Curve(third(last), third(to), to));
                last = to;
            }
            PathSegment::CubicTo(a, b, to) => {
                last = p(to);
                list.push(Segment::Curve(p(a), p(b), last));
            }
            PathSegment::Close => list.push(Segment::Close),
        }
    }
    Ok(list)
}

#[cfg(test)]
mod tests;
