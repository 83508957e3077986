//! The problem file: text in, a valid calculation in SI out.
//!
//! Owns: the format (`keys`), reading (`read`), meaning (`resolve`), the valid calculation (`model`).
//! Does not own: files (`world`; named files arrive as bytes), marching.

pub mod keys;
pub mod model;
pub mod read;
pub mod resolve;
pub mod schema;
