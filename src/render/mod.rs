//! Writers of the document: Markdown, figures, PDF.
//!
//! Owns: page style, faces, layout, file formats of the pages. Does not own: any number or sentence of the
//! record (`record::block` brings them as text), and nothing here may compute or reformat one.

pub mod compose;
pub mod face;
pub mod figure;
pub mod markdown;
pub mod math;
pub mod pdf;
pub mod scene;
pub mod sketch;
pub mod style;
pub mod svg;

#[cfg(test)]
mod sample;

pub use style::PageStyle;

use std::fmt;

/// Why a document could not be written.
#[derive(Clone, Debug, PartialEq)]
pub enum RenderError {
    /// Characters that none of the bundled faces can show, each once, ascending.
    MissingGlyphs(Vec<char>),
    /// A picture file of the user that cannot be drawn.
    Picture { file: String, fault: PictureFault },
    /// A plot whose data cannot be drawn.
    Plot { file: String, fault: PlotFault },
    /// A page style that cannot be read.
    Style(StyleFault),
    /// A bundled font program that cannot be read or cut down: a fault of this program.
    Face(&'static str),
    /// A formula that the mathematics layout refused: a fault of this program.
    Formula(String),
    /// A page file that could not be assembled: a fault of this program.
    Assembly(&'static str),
}

#[derive(Clone, Debug, PartialEq, Eq)]
pub enum PictureFault {
    /// Neither SVG nor PNG nor JPEG.
    UnknownKind,
    /// The named part of the file is damaged.
    Damaged(&'static str),
    /// A feature that print cannot keep faithfully, by its name in the format.
    Unsupported(&'static str),
    /// A link to something outside the picture file.
    ExternalReference,
    /// Width or height is zero, or there are more pixels than a page can use.
    Size,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PlotFault {
    NoPanel,
    /// An axis whose range is empty, not finite, or not positive on a logarithmic scale.
    Range,
}

#[derive(Clone, Debug, PartialEq)]
pub enum StyleFault {
    Syntax(toml::de::Error),
    /// The named key holds a value that no page can be made of.
    Value(&'static str),
}

impl fmt::Display for RenderError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            RenderError::MissingGlyphs(characters) => {
                write!(f, "no bundled face has these characters:")?;
                characters
                    .iter()
                    .try_for_each(|c| write!(f, " {c:?} (U+{:04X})", *c as u32))
            }
            RenderError::Picture { file, fault } => write!(f, "picture {file}: {fault}"),
            RenderError::Plot { file, fault } => write!(f, "figure {file}: {fault}"),
            RenderError::Style(StyleFault::Syntax(error)) => write!(f, "page style: {error}"),
            RenderError::Style(StyleFault::Value(key)) => {
                write!(f, "page style: the value of `{key}` is out of range")
            }
            RenderError::Face(name) => write!(f, "bundled face {name} cannot be used"),
            RenderError::Formula(alternative) => {
                write!(f, "formula cannot be laid out: {alternative}")
            }
            RenderError::Assembly(part) => write!(f, "page file could not be assembled: {part}"),
        }
    }
}

impl fmt::Display for PictureFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            PictureFault::UnknownKind => write!(f, "is neither SVG nor PNG nor JPEG"),
            PictureFault::Damaged(part) => write!(f, "is damaged ({part})"),
            PictureFault::Unsupported(feature) => {
                write!(f, "uses {feature}, which is not kept in print")
            }
            PictureFault::ExternalReference => write!(f, "refers to another file"),
            PictureFault::Size => write!(f, "has a size that a page cannot use"),
        }
    }
}

impl fmt::Display for PlotFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            PlotFault::NoPanel => write!(f, "has no panel"),
            PlotFault::Range => write!(f, "has an axis with an empty or impossible range"),
        }
    }
}

impl std::error::Error for RenderError {}
