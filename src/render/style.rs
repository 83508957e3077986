//! The page style: sizes, colours, line styles and fixed words, as data from `templates/page.toml`.

use serde::Deserialize;

use super::{RenderError, StyleFault};

const BUILTIN: &str = include_str!("../../templates/page.toml");
const POINTS_PER_MM: f32 = 72.0 / 25.4;

/// Everything about the look of a page that is not content; lengths in points.
#[derive(Clone, Debug, PartialEq)]
pub struct PageStyle {
    pub width: f32,
    pub height: f32,
    pub left: f32,
    pub right: f32,
    pub top: f32,
    pub bottom: f32,
    pub colour: Colours,
    pub text: TextSizes,
    pub figure: FigureStyle,
    pub lines: Vec<LineStyle>,
    pub words: Words,
}

/// A colour in sRGB, eight bits a channel.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Rgb(pub u8, pub u8, pub u8);

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Colours {
    pub accent: Rgb,
    pub ink: Rgb,
    pub muted: Rgb,
    pub hairline: Rgb,
    pub tint: Rgb,
    pub good: Rgb,
    pub good_tint: Rgb,
    pub bad: Rgb,
    pub bad_tint: Rgb,
    pub caution: Rgb,
    pub caution_tint: Rgb,
    pub watermark: Rgb,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct TextSizes {
    pub size_pt: f32,
    pub leading_pt: f32,
    pub small_pt: f32,
    pub small_leading_pt: f32,
    pub table_pt: f32,
    pub table_leading_pt: f32,
    pub listing_pt: f32,
    pub listing_leading_pt: f32,
    pub equation_pt: f32,
    /// "." or ",": the sign on which decimal columns align.
    pub decimal_sign: char,
    /// BCP 47 tag of the fixed words and of the text.
    pub language: String,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct FigureStyle {
    pub label_pt: f32,
    pub title_pt: f32,
    pub panel_height_pt: f32,
    pub single_panel_height_pt: f32,
    pub grid: Rgb,
    pub minor_grid: Rgb,
    pub axis: Rgb,
    pub mark: Rgb,
    pub instant: Rgb,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LineStyle {
    pub colour: Rgb,
    pub width_pt: f32,
    pub dash_pt: Vec<f32>,
    pub marker: Marker,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Marker {
    Disc,
    Square,
    Triangle,
    Diamond,
    Ring,
    Cross,
}

/// The words that the writers add of their own.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Words {
    pub contents: String,
    pub continued: String,
    pub page: String,
    pub of: String,
    pub revision: String,
    pub signature: String,
    pub role: String,
    pub name: String,
    pub date: String,
    pub issuer: String,
    pub standing: String,
    pub number: String,
    pub preliminary: String,
}

impl PageStyle {
    /// The style that ships with the program.
    ///
    /// # Errors
    /// Only when `templates/page.toml` itself is at fault.
    pub fn builtin() -> Result<PageStyle, RenderError> {
        PageStyle::parse(BUILTIN)
    }

    /// Reads a style in the form of `templates/page.toml`.
    ///
    /// # Errors
    /// [`RenderError::Style`] with the place of the fault, or with the key whose value leaves no room for text.
    pub fn parse(source: &str) -> Result<PageStyle, RenderError> {
        let file: File = toml::from_str(source)
            .map_err(|error| RenderError::Style(StyleFault::Syntax(error)))?;
        let (width, height) = file.page.size.points();
        let style = PageStyle {
            width,
            height,
            left: file.page.left_mm * POINTS_PER_MM,
            right: file.page.right_mm * POINTS_PER_MM,
            top: file.page.top_mm * POINTS_PER_MM,
            bottom: file.page.bottom_mm * POINTS_PER_MM,
            colour: file.colour,
            text: file.text,
            figure: file.figure,
            lines: file.line,
            words: file.words,
        };
        match style.fault() {
            Some(key) => Err(RenderError::Style(StyleFault::Value(key))),
            None => Ok(style),
        }
    }

    /// Width of the text block, in points.
    pub fn measure(&self) -> f32 {
        self.width - self.left - self.right
    }

    /// Height of the text block, in points.
    pub fn depth(&self) -> f32 {
        self.height - self.top - self.bottom
    }

    /// Line style of a series; styles repeat when there are more series than styles.
    pub fn line(&self, index: usize) -> &LineStyle {
        &self.lines[index % self.lines.len()]
    }

    fn fault(&self) -> Option<&'static str> {
        let text = &self.text;
        let sizes = [
            ("text.size_pt", text.size_pt, text.leading_pt),
            ("text.small_pt", text.small_pt, text.small_leading_pt),
            ("text.table_pt", text.table_pt, text.table_leading_pt),
            ("text.listing_pt", text.listing_pt, text.listing_leading_pt),
            ("text.equation_pt", text.equation_pt, text.leading_pt * 1.5),
            ("figure.label_pt", self.figure.label_pt, 14.0),
            ("figure.title_pt", self.figure.title_pt, 14.0),
        ];
        let within = |value: f32, low: f32, high: f32| value >= low && value <= high;
        let margins = [self.left, self.right, self.top, self.bottom];
        let heights = [
            self.figure.panel_height_pt,
            self.figure.single_panel_height_pt,
        ];
        if !margins.iter().all(|m| within(*m, 30.0, 150.0)) {
            return Some("page.left_mm, right_mm, top_mm, bottom_mm");
        }
        if let Some((key, ..)) = sizes
            .iter()
            .find(|(_, size, leading)| !within(*size, 5.0, 14.0) || !within(*leading, *size, 24.0))
        {
            return Some(key);
        }
        if !heights.iter().all(|h| within(*h, 60.0, 400.0)) {
            return Some("figure.panel_height_pt");
        }
        let usable = |line: &LineStyle| {
            within(line.width_pt, 0.2, 4.0) && line.dash_pt.iter().all(|d| within(*d, 0.2, 20.0))
        };
        if self.lines.is_empty() || !self.lines.iter().all(usable) {
            return Some("line");
        }
        (!matches!(text.decimal_sign, '.' | ',')).then_some("text.decimal_sign")
    }
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    page: Page,
    colour: Colours,
    text: TextSizes,
    figure: FigureStyle,
    line: Vec<LineStyle>,
    words: Words,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Page {
    size: PaperSize,
    left_mm: f32,
    right_mm: f32,
    top_mm: f32,
    bottom_mm: f32,
}

#[derive(Clone, Copy, Deserialize)]
enum PaperSize {
    A4,
    Letter,
}

impl PaperSize {
    fn points(self) -> (f32, f32) {
        match self {
            // ISO 216: 210 mm by 297 mm.
            PaperSize::A4 => (595.276, 841.89),
            PaperSize::Letter => (612.0, 792.0),
        }
    }
}

impl<'de> Deserialize<'de> for Rgb {
    fn deserialize<D: serde::Deserializer<'de>>(deserializer: D) -> Result<Rgb, D::Error> {
        let text = String::deserialize(deserializer)?;
        let digits = text
            .strip_prefix('#')
            .filter(|d| d.len() == 6 && d.is_ascii());
        let value = digits.and_then(|d| u32::from_str_radix(d, 16).ok());
        let channel = |shift: u32, v: u32| ((v >> shift) & 0xff) as u8;
        value
            .map(|v| Rgb(channel(16, v), channel(8, v), channel(0, v)))
            .ok_or_else(|| serde::de::Error::custom("a colour is written \"#rrggbb\""))
    }
}
