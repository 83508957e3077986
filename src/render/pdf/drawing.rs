//! Pages with everything in its place become drawing operations, links and an outline.

use std::collections::BTreeMap;

use printpdf::{
    DictItem, ExternalStream, ExternalXObject, Mm, PdfDocument, PdfPage, PdfSaveOptions, XObject,
    XObjectId,
};

use super::canvas::{Artifact, Canvas, image_name};
use super::finish::{Finish, Link, Outline, Place};
use super::page_break::Page;
use super::strip::{Band, Drawn, PageNumber, Piece};
use super::tags::Tags;
use super::{Pages, font, furniture};
use crate::record::block::Identity;
use crate::render::RenderError;
use crate::render::face::{FaceId, Faces};
use crate::render::scene::Area;
use crate::render::sketch::{Raster, RasterData};
use crate::render::style::PageStyle;

/// Draws the pages.
///
/// # Errors
/// [`RenderError::Face`] if a font program cannot be cut down.
pub fn draw<'a>(
    laid: Pages,
    identity: &'a Identity,
    style: &'a PageStyle,
    faces: &'a Faces,
) -> Result<(lopdf::Document, Finish<'a>), RenderError> {
    let Pages {
        pages,
        rasters,
        mut tags,
    } = laid;
    let places = places(&pages);
    let mut file = PdfDocument::new(&identity.title);
    for (index, raster) in rasters.into_iter().enumerate() {
        file.resources
            .xobjects
            .map
            .insert(XObjectId(image_name(index)), image(raster));
    }
    let count = pages.len();
    let mut links = Vec::new();
    for (number, page) in pages.iter().enumerate() {
        let mut drawing = Drawing {
            style,
            faces,
            places: &places,
            canvas: Canvas::new(style.height, faces),
            content: 0,
            number,
            links: Vec::new(),
        };
        if identity.standing == "preliminary" {
            furniture::watermark(&mut drawing.canvas, style, faces);
        }
        if !page.cover {
            furniture::head(&mut drawing.canvas, identity, style, faces);
        }
        drawing.bands(page);
        for (top, strip) in &page.placed {
            // Nothing of a repeated head belongs to the structure: it is the page's.
            let repeated = strip.pieces.iter().all(|piece| piece.element.is_none());
            let other = if repeated {
                Artifact::Header
            } else {
                Artifact::Layout
            };
            for piece in &strip.pieces {
                drawing.piece(piece, *top, other, &mut tags);
            }
        }
        furniture::foot(
            &mut drawing.canvas,
            identity,
            number + 1,
            count,
            style,
            faces,
        );
        let millimetres = |points: f32| Mm(points * 25.4 / 72.0);
        file.pages.push(PdfPage::new(
            millimetres(style.width),
            millimetres(style.height),
            drawing.canvas.ops,
        ));
        links.push(drawing.links);
    }
    let subsets = font::embed(&mut file, faces)?;
    let options = PdfSaveOptions {
        optimize: false,
        subset_fonts: false,
        secure: false,
        image_optimization: None,
    };
    let mut written = printpdf::serialize::to_lopdf_doc(&file, &options, &mut Vec::new());
    font::list_glyphs(&mut written, &subsets);
    Ok((
        written,
        Finish {
            identity,
            style,
            outline: outline(&pages),
            links,
            tags,
        },
    ))
}

/// Where every anchor stands.
fn places(pages: &[Page]) -> BTreeMap<String, Place> {
    let mut places = BTreeMap::new();
    for (page, content) in pages.iter().enumerate() {
        for (y, strip) in &content.placed {
            if let Some(anchor) = &strip.anchor {
                places
                    .entry(anchor.clone())
                    .or_insert(Place { page, y: *y });
            }
        }
    }
    places
}

fn outline(pages: &[Page]) -> Vec<Outline> {
    let entries = pages
        .iter()
        .enumerate()
        .flat_map(|(page, content)| content.placed.iter().map(move |placed| (page, placed)));
    entries
        .filter_map(|(page, (y, strip))| {
            let entry = strip.outline.as_ref()?;
            Some(Outline {
                level: entry.level,
                title: entry.title.clone(),
                place: Place { page, y: *y },
            })
        })
        .collect()
}

/// One page being drawn.
struct Drawing<'a> {
    style: &'a PageStyle,
    faces: &'a Faces,
    places: &'a BTreeMap<String, Place>,
    canvas: Canvas<'a>,
    /// Number of the next piece of marked content.
    content: usize,
    number: usize,
    links: Vec<Link>,
}

impl Drawing<'_> {
    /// Grounds of boxes: one for each run of strips that share it.
    fn bands(&mut self, page: &Page) {
        let mut runs: Vec<(Band, f32, f32)> = Vec::new();
        for (top, strip) in &page.placed {
            let Some(band) = strip.band else { continue };
            match runs.last_mut() {
                Some((last, _, bottom)) if last.id == band.id => *bottom = top + strip.height,
                _ => runs.push((band, *top, top + strip.height)),
            }
        }
        if runs.is_empty() {
            return;
        }
        self.canvas.begin_artifact(Artifact::Layout);
        for (band, top, bottom) in runs {
            self.canvas.fill_area(
                &Area {
                    left: band.left,
                    top,
                    right: band.right,
                    bottom,
                },
                band.ground,
            );
            if let Some(bar) = band.bar {
                self.canvas.fill_area(
                    &Area {
                        left: band.left,
                        top,
                        right: band.left + 2.4,
                        bottom,
                    },
                    bar,
                );
            }
        }
        self.canvas.end();
    }

    fn piece(&mut self, piece: &Piece, top: f32, other: Artifact, tags: &mut Tags) {
        match piece.element {
            Some(element) if piece.marks.is_empty() => tags.attach(element),
            Some(element) => {
                self.canvas.begin(tags.role_name(element), self.content);
                tags.mark(element, self.number, self.content);
                self.content += 1;
            }
            None => self.canvas.begin_artifact(other),
        }
        if piece.marks.is_empty() {
            return;
        }
        for mark in &piece.marks {
            match mark {
                Drawn::PageNumber(number) => self.page_number(number, top),
                mark => self.canvas.mark(mark, top),
            }
        }
        self.canvas.end();
        self.link(piece, top);
    }

    fn link(&mut self, piece: &Piece, top: f32) {
        let (Some(anchor), Some(element)) = (&piece.link, piece.element) else {
            return;
        };
        let Some(target) = self.places.get(anchor).copied() else {
            return;
        };
        let leaders = piece.marks.iter().find_map(|mark| match mark {
            Drawn::PageNumber(number) => Some(number.area()),
            _ => None,
        });
        let Some(area) = leaders.or_else(|| piece.text_area()) else {
            return;
        };
        let area = Area {
            top: area.top + top - 1.0,
            bottom: area.bottom + top + 1.0,
            ..area
        };
        let description = match piece.text().trim() {
            "" => format!("{} {}", self.style.words.page, target.page + 1),
            text => text.to_owned(),
        };
        self.links.push(Link {
            area,
            target,
            description,
            element,
        });
    }

    /// The number of the page that an entry leads to, after a row of dots.
    fn page_number(&mut self, entry: &PageNumber, top: f32) {
        const STEP: f32 = 4.6;
        const ROOM: f32 = 18.0;
        let face = match entry.strong {
            true => FaceId::SansStrong,
            false => FaceId::Sans,
        };
        let colour = self.style.colour.clone();
        let page = self
            .places
            .get(&entry.anchor)
            .map_or(0, |place| place.page + 1)
            .to_string();
        let width = self.faces.width(face, &page, entry.size, true);
        let baseline = top + entry.baseline;
        self.canvas.line(
            face,
            entry.size,
            &page,
            entry.right - width,
            baseline,
            colour.ink,
        );
        // Dots stand on a common grid from the right, so that the leaders of all entries align.
        let mut x = entry.right - ROOM.max(width + 4.0);
        while x > entry.from + 6.0 {
            let dot = Area {
                left: x,
                top: baseline - 0.9,
                right: x + 0.8,
                bottom: baseline - 0.1,
            };
            self.canvas.fill_area(&dot, colour.muted);
            x -= STEP;
        }
    }
}

fn image(raster: Raster) -> XObject {
    let name = |text: &str| DictItem::Name(text.as_bytes().to_vec());
    let (space, filter, content) = match raster.data {
        RasterData::Rgb(pixels) => ("DeviceRGB", None, pixels),
        RasterData::Jpeg {
            components: 1,
            file,
        } => ("DeviceGray", Some("DCTDecode"), file),
        RasterData::Jpeg { file, .. } => ("DeviceRGB", Some("DCTDecode"), file),
    };
    let mut dict = BTreeMap::from([
        ("Type".to_owned(), name("XObject")),
        ("Subtype".to_owned(), name("Image")),
        ("Width".to_owned(), DictItem::Int(i64::from(raster.width))),
        ("Height".to_owned(), DictItem::Int(i64::from(raster.height))),
        ("ColorSpace".to_owned(), name(space)),
        ("BitsPerComponent".to_owned(), DictItem::Int(8)),
    ]);
    if let Some(filter) = filter {
        dict.insert("Filter".to_owned(), name(filter));
    }
    let stream = ExternalStream {
        dict,
        content,
        compress: filter.is_none(),
    };
    XObject::External(ExternalXObject {
        stream,
        width: None,
        height: None,
        dpi: None,
    })
}
