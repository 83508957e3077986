//! Countermarch turns one problem file into one audited, reproducible calculation package.
//!
//! A calculation flows one way, and each module may use only those above it in this list, which is in reading
//! order (`tests/it/arrows` holds the exact table and reads it off the source).

// Foundations.
pub mod float;

pub mod diagnostic;

// The language of problems.
pub mod units;

pub mod formula;

// The numerical kernel: builds alone, knows slices only.
pub mod march;

// A problem file, solved and judged.
pub mod problem;

pub mod calculation;

pub mod evidence;

pub mod judgement;

// What is said about it, and how it looks.
pub mod record;

pub mod render;

// What is delivered: bytes only.
pub mod package;

// The only door to the outside.
pub mod world;

// What a reader does with what was delivered.
pub mod review;

// Stages in order, one function a command; then the command line.
pub mod pipeline;

pub mod cli;
