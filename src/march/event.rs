//! What happens when a condition turns true.

/// Sets of one event within one step, and sets at one instant, beyond which the march stops as chattering.
pub const SET_LIMIT: u32 = 100;

/// An event: the instant at which a condition turns from false to true. Its number is its place in the file.
#[derive(Debug, Clone, PartialEq)]
pub struct EventRule {
    /// Number of the condition in the [`super::System`].
    pub condition: usize,
    pub action: Action,
    /// Only the first occurrence acts and counts.
    pub once: bool,
    /// What a condition that is true at the start means: an event there, or not until it has been false.
    pub at_start: Option<bool>,
}

/// What an event does.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Action {
    /// Nothing: the march goes on as if it had not been looked for.
    Note,
    /// The march ends there.
    Stop,
    /// [`super::System::assign`] is called and the march goes on with a shorter step to the next grid point.
    Set,
}

/// One event that came.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Occurrence {
    pub event: usize,
    pub at: f64,
}

/// A condition that seemed to turn within a step, by stage or mid-step values less exact than the method, but does
/// not by the method's own partial steps: it may do so at another step.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Graze {
    pub condition: usize,
    /// Start of the step.
    pub at: f64,
}
