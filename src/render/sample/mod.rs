//! An invented record for tests: the drain-down of a break tank at a pumping station. Its numbers illustrate a page
//! and are no result of anything.

mod back;
mod front;
mod hard;
mod plots;

pub use hard::hard;
pub use plots::{SKETCH, history};

use crate::formula::typeset::Math;
use crate::record::block::*;

pub fn record() -> Document {
    let blocks = [
        front::cover(),
        front::contents(),
        front::summary(),
        front::basis(),
        front::inputs(),
        back::equations(),
        back::results(),
        back::evidence(),
        back::appendices(),
    ]
    .concat();
    Document {
        identity: identity(),
        blocks,
    }
}

pub fn identity() -> Identity {
    Identity {
        number: "PS7-C-0412".into(),
        revision: "B".into(),
        title: "Break tank T-201: drain-down after loss of supply".into(),
        project: "Upper Harrow pumping station, refurbishment 2026".into(),
        issuer: "Example Water Engineers".into(),
        author: "M. Okafor".into(),
        date: "2026-03-14".into(),
        standing: "preliminary".into(),
        fingerprint: "sha256:9f2c41d70be377aa61f00e5f2c6b7d0f1a8e4c5b3d2916f7a0b1c2d3e4f50617"
            .into(),
        program: "countermarch 0.1.0".into(),
    }
}

pub fn plain(text: &str) -> Text {
    vec![Inline::Text(text.into())]
}

pub fn symbol(name: &str) -> Math {
    match name.split_once('_') {
        Some((base, index)) => Math::Subscript(
            Box::new(Math::Symbol(base.into())),
            Box::new(Math::Symbol(index.into())),
        ),
        None => Math::Symbol(name.into()),
    }
}

pub fn number(digits: &str) -> Math {
    Math::Number(digits.into())
}

pub fn operator(sign: &str) -> Math {
    Math::Operator(sign.into())
}

pub fn row(parts: Vec<Math>) -> Math {
    Math::Row(parts)
}

pub fn fraction(above: Math, below: Math) -> Math {
    Math::Fraction(Box::new(above), Box::new(below))
}

pub fn power(base: Math, exponent: Math) -> Math {
    Math::Superscript(Box::new(base), Box::new(exponent))
}

pub fn root(radicand: Math) -> Math {
    Math::Root {
        radicand: Box::new(radicand),
        degree: None,
    }
}

pub fn fenced(body: Math) -> Math {
    Math::Fenced {
        open: '(',
        close: ')',
        body: Box::new(body),
    }
}

pub fn math(name: &str) -> Inline {
    Inline::Math(symbol(name))
}

pub fn heading(level: u8, number: &str, text: &str, anchor: &str) -> Block {
    Block::Heading(Heading {
        level,
        number: number.into(),
        text: text.into(),
        anchor: anchor.into(),
    })
}

pub fn paragraph(text: &str) -> Block {
    Block::Paragraph(plain(text))
}

pub fn reference(text: &str, anchor: &str) -> Inline {
    Inline::Reference {
        text: text.into(),
        anchor: anchor.into(),
    }
}

pub fn text(text: &str) -> Inline {
    Inline::Text(text.into())
}

pub fn column(heading: &str, align: Align) -> Column {
    Column {
        heading: plain(heading),
        align,
    }
}

pub fn body(cells: Vec<Text>) -> Row {
    Row {
        cells,
        kind: RowKind::Body,
    }
}

pub fn cells(texts: &[&str]) -> Row {
    body(texts.iter().map(|t| plain(t)).collect())
}
