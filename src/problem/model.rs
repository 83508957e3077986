//! A valid calculation: consistent, dimension-checked, in SI. A `Model` that exists is fit to be marched.
//!
//! Owns: the types. Made only by `resolve`.

use std::collections::BTreeMap;
use std::ops::Range;

use chrono::NaiveDate;

use crate::formula::tree::Tree;
use crate::units::{Dimension, Unit};

#[derive(Clone, Debug)]
pub struct Model {
    /// Name of the problem file, without folders.
    pub file: String,
    /// Its text, as read.
    pub text: String,
    /// Every file that the problem names, as read.
    pub files: BTreeMap<String, Vec<u8>>,
    pub head: Head,
    pub roles: Roles,
    pub verification: Option<Verification>,
    pub revisions: Vec<Revision>,
    pub references: Vec<Reference>,
    pub assumptions: Vec<Assumption>,
    /// Ambient pressure in Pa, for gauge pressures.
    pub ambient: Option<f64>,
    pub inputs: Vec<Input>,
    pub lookups: Vec<Lookup>,
    /// In an order in which each uses only earlier ones.
    pub quantities: Vec<NamedQuantity>,
    pub states: Vec<State>,
    pub switches: Vec<Switch>,
    pub events: Vec<Event>,
    pub march: March,
    pub results: Vec<ResultSpec>,
    pub criteria: Vec<Criterion>,
    pub balances: Vec<Balance>,
    pub closed_forms: Vec<ClosedForm>,
    /// The base case first.
    pub cases: Vec<Case>,
    pub sketches: Vec<FileWithText>,
    pub attachments: Vec<FileWithText>,
    pub validations: Vec<(String, String)>,
    pub known_errors: Vec<(String, String)>,
    pub comments: Vec<Comment>,
    pub figures: Vec<FigureSpec>,
}

#[derive(Clone, Debug)]
pub struct Head {
    pub number: String,
    pub title: String,
    pub project: Option<String>,
    pub client: Option<String>,
    pub issuer: Option<String>,
    pub client_number: Option<String>,
    pub asset: Option<String>,
    pub discipline: Option<String>,
    pub retention: Option<String>,
    pub access: Option<String>,
    pub revision: String,
    pub date: NaiveDate,
    pub standing: Standing,
    pub purpose: String,
    pub basis: Option<String>,
    pub limits: Option<String>,
    pub conclusion: Option<String>,
    pub caution: Option<String>,
    pub supersedes: Option<String>,
    pub checked: Option<String>,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    Preliminary,
    ForCheck,
    Issued,
}

impl Standing {
    pub fn word(self) -> &'static str {
        match self {
            Standing::Preliminary => "preliminary",
            Standing::ForCheck => "for check",
            Standing::Issued => "issued",
        }
    }
}

#[derive(Clone, Debug, Default)]
pub struct Roles {
    pub originator: Option<Person>,
    pub checker: Option<Person>,
    pub approver: Option<Person>,
}

#[derive(Clone, Debug)]
pub struct Person {
    pub name: String,
    pub capacity: Option<String>,
    pub date: Option<NaiveDate>,
}

#[derive(Clone, Debug)]
pub struct Verification {
    pub method: String,
    pub extent: Option<String>,
}

#[derive(Clone, Debug)]
pub struct Revision {
    pub mark: String,
    pub date: Option<NaiveDate>,
    pub change: String,
    pub by: Option<String>,
}

#[derive(Clone, Debug)]
pub struct Reference {
    pub id: String,
    pub text: String,
    pub kind: Option<String>,
    pub edition: Option<String>,
    pub clause: Option<String>,
}

#[derive(Clone, Debug)]
pub struct Assumption {
    pub id: String,
    pub text: String,
    pub basis: String,
    pub standing: AssumptionStanding,
    pub hold: Option<String>,
}

#[derive(Clone, Debug, PartialEq, Eq)]
pub enum AssumptionStanding {
    Confirmed,
    ToBeConfirmed,
    /// By the criterion with this id.
    TestedBy(String),
}

#[derive(Clone, Debug)]
pub struct Input {
    pub symbol: String,
    pub meaning: String,
    /// As written.
    pub value: f64,
    pub unit: Unit,
    pub value_si: f64,
    pub source: String,
    /// Plausibility range in SI.
    pub within: Option<(f64, f64)>,
}

#[derive(Clone, Debug)]
pub struct Lookup {
    pub symbol: String,
    pub meaning: String,
    pub argument: String,
    pub argument_unit: Unit,
    pub unit: Unit,
    /// As written, for print.
    pub points: Vec<(f64, f64)>,
    /// In SI.
    pub points_si: Vec<(f64, f64)>,
    pub between: Between,
    pub outside: Outside,
    /// Input that multiplies the lookup.
    pub factor: Option<String>,
    /// CSV file that the points came from.
    pub file: Option<String>,
    pub source: String,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Between {
    Linear,
    MonotoneCubic,
    Step,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Outside {
    Refuse,
    Hold,
}

/// A checked formula.
#[derive(Clone, Debug)]
pub struct Formula {
    pub text: String,
    pub tree: Tree,
    pub dimension: Dimension,
    /// Where it stands in the problem file.
    pub span: Range<usize>,
}

/// A quantity as written, or a formula of inputs.
#[derive(Clone, Debug)]
pub enum Expression {
    Quantity {
        value: f64,
        unit: Unit,
        value_si: f64,
    },
    Formula(Formula),
}

#[derive(Clone, Debug)]
pub struct NamedQuantity {
    pub symbol: String,
    pub meaning: String,
    pub unit: Unit,
    pub formula: Formula,
    pub source: Option<String>,
}

#[derive(Clone, Debug)]
pub struct State {
    pub symbol: String,
    pub meaning: String,
    pub unit: Unit,
    pub initial: Expression,
    pub initial_source: Option<String>,
    pub rate: Formula,
    pub source: Option<String>,
    pub within: Option<(Expression, Expression)>,
    /// Typical magnitude in SI.
    pub scale: Option<f64>,
}

#[derive(Clone, Debug)]
pub struct Switch {
    pub symbol: String,
    pub meaning: String,
    pub initial: f64,
}

#[derive(Clone, Debug)]
pub struct Event {
    pub id: String,
    pub text: Option<String>,
    pub when: Formula,
    pub action: Action,
    pub once: bool,
    pub at_start: Option<bool>,
    /// Where the event stands in the problem file.
    pub span: Range<usize>,
}

#[derive(Clone, Debug)]
pub enum Action {
    Note,
    Stop,
    /// Symbol of a state or switch, with its new value.
    Set(Vec<(String, Formula)>),
}

#[derive(Clone, Debug)]
pub struct March {
    pub variable: String,
    pub unit: Unit,
    pub from: Expression,
    pub to: Expression,
    pub method: String,
    pub grid: GridSpec,
    pub levels: u32,
    /// Spacing of the printed table in SI; none: chosen.
    pub report_every: Option<f64>,
    pub span: Range<usize>,
}

#[derive(Clone, Debug)]
pub enum GridSpec {
    /// One step, as written and in SI.
    Step {
        value: f64,
        unit: Unit,
        value_si: f64,
    },
    /// (end, step) of each segment, in SI, and their unit for print.
    Segments(Vec<SegmentSpec>),
    /// Chosen once a case, to a tolerance of the local error relative to the states' scales.
    Chosen { tolerance: f64 },
}

#[derive(Clone, Debug)]
pub struct SegmentSpec {
    pub to: f64,
    pub to_unit: Unit,
    pub to_si: f64,
    pub step: f64,
    pub step_unit: Unit,
    pub step_si: f64,
}

#[derive(Clone, Debug)]
pub struct ResultSpec {
    pub symbol: String,
    pub meaning: String,
    pub unit: Unit,
    pub formula: Formula,
    /// True when the result is a point on a scale with a zero of its own (degC, bar(g)).
    pub absolute: bool,
    pub scale: Option<f64>,
}

#[derive(Clone, Debug)]
pub struct Criterion {
    pub id: String,
    pub text: String,
    /// Index into `results`.
    pub result: usize,
    pub limit: Limit,
    pub source: String,
    /// Indices into `cases`.
    pub cases: Vec<usize>,
    pub if_absent: Option<bool>,
}

#[derive(Clone, Debug)]
pub enum Limit {
    AtMost(Expression),
    AtLeast(Expression),
    Between(Expression, Expression),
}

/// A quantity that must stay constant between events that set something.
#[derive(Clone, Debug)]
pub struct Balance {
    pub id: String,
    pub text: String,
    /// Of states, quantities, the variable, and integral(x) as running integral.
    pub formula: Formula,
    /// Relative to the largest magnitude of any summand of the formula.
    pub tolerance: f64,
}

/// A check value for a result, or for a state's whole history.
#[derive(Clone, Debug)]
pub struct ClosedForm {
    pub checked: Checked,
    /// Of inputs; for a state also of the independent variable.
    pub formula: Formula,
    pub is_exact: bool,
    /// Relative.
    pub tolerance: f64,
    /// Index into `cases`.
    pub case: usize,
    pub source: String,
}

/// What a closed form checks, by index.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Checked {
    Result(usize),
    State(usize),
}

#[derive(Clone, Debug)]
pub struct Case {
    pub id: String,
    pub text: String,
    /// Value of every input in SI, in the order of `inputs`.
    pub values: Vec<f64>,
    /// What this case changes: input, value as written, its unit.
    pub changes: Vec<(usize, f64, Unit)>,
    /// Lookups in place of others, by index.
    pub lookups: BTreeMap<usize, usize>,
    pub source: Option<String>,
}

#[derive(Clone, Debug)]
pub struct FileWithText {
    pub file: String,
    pub text: String,
}

#[derive(Clone, Debug)]
pub struct Comment {
    pub id: String,
    pub by: String,
    pub on: Option<String>,
    pub text: String,
    pub response: Option<String>,
    pub standing: String,
}

#[derive(Clone, Debug)]
pub struct FigureSpec {
    pub title: String,
    pub show: Vec<String>,
    pub mark: Vec<String>,
}
