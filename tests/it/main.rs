//! The integration tests: everything that can be seen from outside the crate.
//!
//! Data-driven: one `check` an interface, a new case is a new file or a new line of a table. Names carry their
//! evidence: `val_` an outside source named beside the check, `hand_` worked by hand, `prop_` a property,
//! `regress_` our own earlier output.

mod arrows;
mod claims;
mod cli;
mod evidence;
mod formulas;
mod hostile;
mod problems;
mod random;
mod reference;
mod reproducible;
