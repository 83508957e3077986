//! Formulas: text → tree → dimension check → tape; and tree → typeset expression.
//!
//! Owns: the language of formulas. Does not own: what a symbol stands for (`problem`), lookups' values (`march`).

use std::ops::Range;

use crate::diagnostic::Code;

pub mod derivative;
pub mod dimensions;
pub mod parse;
pub mod tape;
pub mod tree;
pub mod typeset;

/// A fault in a formula; its range counts bytes of the formula's text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fault {
    pub code: &'static Code,
    pub message: String,
    pub span: Range<usize>,
    pub mend: String,
}

impl Fault {
    pub fn new(
        code: &'static Code,
        span: Range<usize>,
        message: impl Into<String>,
        mend: impl Into<String>,
    ) -> Fault {
        Fault {
            code,
            message: message.into(),
            span,
            mend: mend.into(),
        }
    }
}
