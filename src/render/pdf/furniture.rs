//! What stands on every page: running head, foot, watermark.

use super::canvas::{Artifact, Canvas};
use crate::record::block::Identity;
use crate::render::face::{FaceId, Faces};
use crate::render::scene::{Area, Point, Segment};
use crate::render::style::PageStyle;

const SIZE: f32 = 8.0;

/// The large pale word behind the text of a preliminary document, as an outline: it is no text of the page.
pub fn watermark(canvas: &mut Canvas<'_>, style: &PageStyle, faces: &Faces) {
    let (outline, width) = faces.outline(FaceId::SansStrong, &style.words.preliminary);
    let metrics = faces.metrics(FaceId::SansStrong);
    let rise = metrics.cap_height / metrics.units_per_em;
    // Along the diagonal, from the lower left: (cos, sin) of its angle.
    let diagonal = (style.width * style.width + style.height * style.height).sqrt();
    let (cos, sin) = (style.width / diagonal, style.height / diagonal);
    let size = (diagonal * 0.62 / width.max(0.1)).min(style.width * 0.2);
    let start = Point {
        x: style.width / 2.0 - size * (cos * width + sin * rise) / 2.0 + size * sin * rise,
        y: style.height / 2.0 + size * (sin * width + cos * rise) / 2.0,
    };
    let turned = |p: Point| Point {
        x: start.x + size * (cos * p.x + sin * p.y),
        y: start.y + size * (cos * p.y - sin * p.x),
    };
    let segments: Vec<Segment> = outline
        .iter()
        .map(|segment| match segment {
            Segment::Move(p) => Segment::Move(turned(*p)),
            Segment::Line(p) => Segment::Line(turned(*p)),
            Segment::Curve(a, b, p) => Segment::Curve(turned(*a), turned(*b), turned(*p)),
            Segment::Close => Segment::Close,
        })
        .collect();
    canvas.begin_artifact(Artifact::Watermark);
    canvas.fill_path(&segments, style.colour.watermark);
    canvas.end();
}

/// Title on the left, number and revision on the right, above a rule.
pub fn head(canvas: &mut Canvas<'_>, identity: &Identity, style: &PageStyle, faces: &Faces) {
    let (left, right) = (style.left, style.width - style.right);
    let baseline = style.top - 30.0;
    let reference = format!(
        "{} · {} {}",
        identity.number, style.words.revision, identity.revision
    );
    let width = faces.width(FaceId::Sans, &reference, SIZE, true);
    let preliminary = identity.standing == "preliminary";
    let standing = if preliminary {
        style.words.preliminary.as_str()
    } else {
        ""
    };
    let mark = faces.width(FaceId::SansStrong, standing, SIZE * 0.9, true)
        + if preliminary { 10.0 } else { 0.0 };
    let title = shortened(
        &identity.title,
        FaceId::SansStrong,
        SIZE,
        right - left - width - mark - 24.0,
        faces,
    );
    canvas.begin_artifact(Artifact::Header);
    canvas.line(
        FaceId::SansStrong,
        SIZE,
        &title,
        left,
        baseline,
        style.colour.ink,
    );
    canvas.line(
        FaceId::SansStrong,
        SIZE * 0.9,
        standing,
        right - width - mark,
        baseline,
        style.colour.caution,
    );
    canvas.line(
        FaceId::Sans,
        SIZE,
        &reference,
        right - width,
        baseline,
        style.colour.muted,
    );
    canvas.fill_area(
        &Area {
            left,
            right,
            top: baseline + 7.0,
            bottom: baseline + 7.6,
        },
        style.colour.accent,
    );
    canvas.end();
}

/// Fingerprint and program on the left, the page's number on the right, below a rule.
pub fn foot(
    canvas: &mut Canvas<'_>,
    identity: &Identity,
    page: usize,
    pages: usize,
    style: &PageStyle,
    faces: &Faces,
) {
    let (left, right) = (style.left, style.width - style.right);
    let baseline = style.height - style.bottom + 32.0;
    let number = format!("{} {page} {} {pages}", style.words.page, style.words.of);
    let width = faces.width(FaceId::Sans, &number, SIZE, true);
    canvas.begin_artifact(Artifact::Footer);
    canvas.fill_area(
        &Area {
            left,
            right,
            top: baseline - 13.2,
            bottom: baseline - 12.9,
        },
        style.colour.hairline,
    );
    let print = short_fingerprint(&identity.fingerprint);
    let mut x = left;
    if !print.is_empty() {
        x += canvas.line(
            FaceId::Mono,
            6.6,
            &print,
            left,
            baseline,
            style.colour.muted,
        ) + 10.0;
    }
    let program = shortened(
        &identity.program,
        FaceId::Sans,
        7.2,
        right - width - x - 12.0,
        faces,
    );
    canvas.line(FaceId::Sans, 7.2, &program, x, baseline, style.colour.muted);
    canvas.line(
        FaceId::Sans,
        SIZE,
        &number,
        right - width,
        baseline,
        style.colour.muted,
    );
    canvas.end();
}

/// The first sixteen digits in groups of four, with the name of the digest.
fn short_fingerprint(fingerprint: &str) -> String {
    let (name, digits) = fingerprint.split_once(':').unwrap_or(("", fingerprint));
    let digits: Vec<char> = digits.chars().take(16).collect();
    let groups: Vec<String> = digits
        .chunks(4)
        .map(|group| group.iter().collect())
        .collect();
    format!("{name} {}", groups.join(" ")).trim().to_owned()
}

/// A text that does not fit ends with an ellipsis.
fn shortened(text: &str, face: FaceId, size: f32, room: f32, faces: &Faces) -> String {
    if faces.width(face, text, size, true) <= room {
        return text.to_owned();
    }
    let characters: Vec<char> = text.chars().collect();
    let fits = |count: usize| {
        let cut: String = characters[..count]
            .iter()
            .collect::<String>()
            .trim_end()
            .to_owned()
            + "…";
        (faces.width(face, &cut, size, true) <= room).then_some(cut)
    };
    (0..characters.len())
        .rev()
        .find_map(fits)
        .unwrap_or_default()
}
