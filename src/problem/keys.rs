//! Every key of the problem file, once: name, type, whether required, what it means, an example.
//!
//! Owns: this table. It drives the reader, its suggestions, the reference and the JSON Schema; a new key is a line
//! here and its use in `resolve`.

/// A TOML table of the problem file.
#[derive(Debug)]
pub struct Table {
    /// As written between brackets; empty for the file itself.
    pub name: &'static str,
    pub doc: &'static str,
    pub keys: &'static [Key],
}

#[derive(Debug)]
pub struct Key {
    pub name: &'static str,
    pub shape: Shape,
    pub required: bool,
    pub doc: &'static str,
    pub example: &'static str,
}

/// What a key's value looks like.
#[derive(Clone, Copy, Debug)]
pub enum Shape {
    /// Free text, not empty.
    Text,
    /// One of these words.
    Word(&'static [&'static str]),
    /// A name usable in formulas: a letter, then letters, digits, underscores.
    Symbol,
    /// Free text that other keys refer to.
    Id,
    /// A whole number between the bounds.
    Integer(i64, i64),
    /// A plain number between the bounds.
    Number(f64, f64),
    Truth,
    /// A calendar date.
    Date,
    /// A bare number, or text "12.5 m^2".
    Quantity,
    /// A quantity or a formula.
    Expression,
    Formula,
    /// A unit, as text.
    Unit,
    /// A file below the problem's folder.
    Path,
    /// `sha256:` and 64 hexadecimal digits.
    Digest,
    /// Two quantities or formulas: a lower and an upper bound.
    Bounds,
    /// Texts in an array.
    Texts,
    /// Pairs of numbers in an array.
    Points,
    /// A table of expressions by symbol.
    Assignments,
    /// A table of texts by symbol.
    Names,
    Section(&'static Table),
    Sections(&'static Table),
}

const fn required(
    name: &'static str,
    shape: Shape,
    doc: &'static str,
    example: &'static str,
) -> Key {
    Key {
        name,
        shape,
        required: true,
        doc,
        example,
    }
}

const fn optional(
    name: &'static str,
    shape: Shape,
    doc: &'static str,
    example: &'static str,
) -> Key {
    Key {
        name,
        shape,
        required: false,
        doc,
        example,
    }
}

pub static PROBLEM: Table = Table {
    name: "",
    doc: "One calculation, completely.",
    keys: &[
        required(
            "format",
            Shape::Integer(1, 1),
            "version of this file format; stands first",
            "1",
        ),
        required(
            "calculation",
            Shape::Section(&CALCULATION),
            "what the calculation is",
            "",
        ),
        optional(
            "roles",
            Shape::Section(&ROLES),
            "originator, checker, approver",
            "",
        ),
        optional(
            "verification",
            Shape::Section(&VERIFICATION),
            "what the checker did",
            "",
        ),
        optional(
            "revision",
            Shape::Sections(&REVISION),
            "history, oldest first",
            "",
        ),
        optional("reference", Shape::Sections(&REFERENCE), "sources", ""),
        optional(
            "assumption",
            Shape::Sections(&ASSUMPTION),
            "assumptions with basis and standing",
            "",
        ),
        optional(
            "input",
            Shape::Sections(&INPUT),
            "every number that enters the model",
            "",
        ),
        optional(
            "lookup",
            Shape::Sections(&LOOKUP),
            "tabulated functions",
            "",
        ),
        optional(
            "quantity",
            Shape::Sections(&QUANTITY),
            "named intermediates",
            "",
        ),
        optional("state", Shape::Sections(&STATE), "what is marched", ""),
        optional(
            "switch",
            Shape::Sections(&SWITCH),
            "discrete values changed by events",
            "",
        ),
        optional(
            "event",
            Shape::Sections(&EVENT),
            "instants at which a condition turns true",
            "",
        ),
        required(
            "march",
            Shape::Section(&MARCH),
            "independent variable, span, method, step",
            "",
        ),
        optional("result", Shape::Sections(&RESULT), "what is wanted", ""),
        optional(
            "criterion",
            Shape::Sections(&CRITERION),
            "what results must satisfy",
            "",
        ),
        optional(
            "balance",
            Shape::Sections(&BALANCE),
            "quantities that must stay constant",
            "",
        ),
        optional(
            "closed_form",
            Shape::Sections(&CLOSED_FORM),
            "check values",
            "",
        ),
        optional(
            "case",
            Shape::Sections(&CASE),
            "design cases beside the base case",
            "",
        ),
        optional(
            "uncertainty",
            Shape::Section(&UNCERTAINTY),
            "ensemble over uncertain inputs",
            "",
        ),
        optional(
            "correlation",
            Shape::Sections(&CORRELATION),
            "correlated inputs",
            "",
        ),
        optional("site", Shape::Section(&SITE), "facts of the site", ""),
        optional(
            "record",
            Shape::Section(&RECORD),
            "the look of the record",
            "",
        ),
        optional(
            "figure",
            Shape::Sections(&FIGURE),
            "figures beside the usual ones",
            "",
        ),
        optional(
            "sketch",
            Shape::Sections(&SKETCH),
            "pictures of the system",
            "",
        ),
        optional(
            "attachment",
            Shape::Sections(&ATTACHMENT),
            "source documents to be archived",
            "",
        ),
        optional(
            "validation",
            Shape::Sections(&VALIDATION),
            "comparisons with test or field data",
            "",
        ),
        optional(
            "known_error",
            Shape::Sections(&KNOWN_ERROR),
            "errata considered",
            "",
        ),
        optional("comment", Shape::Sections(&COMMENT), "the review log", ""),
    ],
};

pub static STANDINGS: &[&str] = &["preliminary", "for check", "issued"];

static CALCULATION: Table = Table {
    name: "calculation",
    doc: "What the calculation is and what it is for.",
    keys: &[
        required(
            "number",
            Shape::Text,
            "number of the calculation",
            "\"HS-217-CAL-004\"",
        ),
        required(
            "title",
            Shape::Text,
            "title",
            "\"Drain-down of break tank T-12\"",
        ),
        optional(
            "project",
            Shape::Text,
            "project",
            "\"Hollin Spur pumping station\"",
        ),
        optional("client", Shape::Text, "client", "\"Hollin Spur Water\""),
        optional("issuer", Shape::Text, "who issues it", "\"Process group\""),
        optional(
            "client_number",
            Shape::Text,
            "the client's number",
            "\"C-881\"",
        ),
        optional("asset", Shape::Text, "asset", "\"T-12\""),
        optional("discipline", Shape::Text, "discipline", "\"process\""),
        optional(
            "retention",
            Shape::Text,
            "retention class",
            "\"life of plant\"",
        ),
        optional("access", Shape::Text, "access class", "\"project\""),
        required("revision", Shape::Text, "revision mark", "\"B\""),
        required(
            "date",
            Shape::Date,
            "date of issue; the only one in the record",
            "2026-11-20",
        ),
        required(
            "standing",
            Shape::Word(STANDINGS),
            "standing of the calculation",
            "\"for check\"",
        ),
        optional(
            "checked",
            Shape::Digest,
            "content fingerprint of the package that was reviewed",
            "\"sha256:…\"",
        ),
        required(
            "purpose",
            Shape::Text,
            "what decision the calculation supports",
            "\"…\"",
        ),
        optional(
            "basis",
            Shape::Text,
            "why this model applies; required when issued",
            "\"…\"",
        ),
        optional("limits", Shape::Text, "range of applicability", "\"…\""),
        optional(
            "conclusion",
            Shape::Text,
            "the originator's words; {symbol}, {symbol @ case} and {K1.finding} are filled in; required when issued",
            "\"The alarm comes {t_alarm} after loss of inflow.\"",
        ),
        optional(
            "caution",
            Shape::Text,
            "caution of this job, beside the standing ones",
            "\"…\"",
        ),
        optional(
            "supersedes",
            Shape::Digest,
            "content fingerprint of what this revision replaces",
            "\"sha256:…\"",
        ),
    ],
};

static ROLES: Table = Table {
    name: "roles",
    doc: "Who signs.",
    keys: &[
        optional(
            "originator",
            Shape::Section(&PERSON),
            "who made the calculation",
            "{ name = \"A. Engineer\", capacity = \"Process engineer\" }",
        ),
        optional(
            "checker",
            Shape::Section(&PERSON),
            "who verified it; not the originator",
            "",
        ),
        optional("approver", Shape::Section(&PERSON), "who released it", ""),
    ],
};

static PERSON: Table = Table {
    name: "person",
    doc: "A name in the sign-off block.",
    keys: &[
        required("name", Shape::Text, "printed name", "\"A. Engineer\""),
        optional(
            "capacity",
            Shape::Text,
            "capacity in which this person signs",
            "\"Process engineer\"",
        ),
        optional("date", Shape::Date, "date of signing", "2026-11-18"),
    ],
};

static VERIFICATION: Table = Table {
    name: "verification",
    doc: "What the checker did.",
    keys: &[
        required(
            "method",
            Shape::Word(&["design review", "alternate calculation", "test"]),
            "method of verification",
            "\"design review\"",
        ),
        optional(
            "extent",
            Shape::Text,
            "extent of verification",
            "\"Inputs against sources.\"",
        ),
    ],
};

static REVISION: Table = Table {
    name: "revision",
    doc: "One line of the history.",
    keys: &[
        required("mark", Shape::Text, "revision mark", "\"A\""),
        required("date", Shape::Date, "date", "2026-10-02"),
        required(
            "change",
            Shape::Text,
            "what changed and why",
            "\"First issue for comment\"",
        ),
        optional("by", Shape::Text, "who changed it", "\"A. Engineer\""),
    ],
};

static REFERENCE: Table = Table {
    name: "reference",
    doc: "A source.",
    keys: &[
        required("id", Shape::Id, "id by which other keys cite it", "\"R1\""),
        required(
            "text",
            Shape::Text,
            "full citation",
            "\"General arrangement drawing HS-217-DR-031 rev C\"",
        ),
        optional(
            "kind",
            Shape::Word(&[
                "code", "standard", "book", "drawing", "report", "test", "letter",
            ]),
            "kind of source",
            "\"drawing\"",
        ),
        optional("edition", Shape::Text, "edition", "\"2022\""),
        optional("clause", Shape::Text, "clause or table", "\"table 4\""),
    ],
};

static ASSUMPTION: Table = Table {
    name: "assumption",
    doc: "An assumption, with basis and standing.",
    keys: &[
        required("id", Shape::Id, "id", "\"A1\""),
        required(
            "text",
            Shape::Text,
            "what is assumed",
            "\"The outlet discharges freely.\"",
        ),
        required("basis", Shape::Text, "reference id or free text", "\"R1\""),
        optional(
            "standing",
            Shape::Word(&["confirmed", "to be confirmed"]),
            "standing",
            "\"confirmed\"",
        ),
        optional(
            "tested_by",
            Shape::Id,
            "criterion that confirms it, in place of standing",
            "\"K4\"",
        ),
        optional(
            "hold",
            Shape::Text,
            "what must not proceed until it is confirmed",
            "\"Ordering of the valve\"",
        ),
    ],
};

static INPUT: Table = Table {
    name: "input",
    doc: "A number that enters the model, with its unit and where it came from.",
    keys: &[
        required("symbol", Shape::Symbol, "symbol", "\"C_d\""),
        required(
            "meaning",
            Shape::Text,
            "meaning",
            "\"discharge coefficient of the outlet\"",
        ),
        optional(
            "value",
            Shape::Quantity,
            "value with unit; a bare number is dimensionless",
            "\"12.5 m^2\"",
        ),
        required(
            "source",
            Shape::Text,
            "reference id, assumption id or free text",
            "\"R2\"",
        ),
        optional(
            "spread",
            Shape::Section(&SPREAD),
            "uncertainty of the value",
            "{ kind = \"uniform\", half_width = 0.02 }",
        ),
        optional(
            "within",
            Shape::Bounds,
            "plausibility range",
            "[0.55, 0.70]",
        ),
        optional(
            "from",
            Shape::Section(&FROM),
            "in place of value: a result of another package",
            "",
        ),
    ],
};

static SPREAD: Table = Table {
    name: "spread",
    doc: "Distribution of an input.",
    keys: &[
        required(
            "kind",
            Shape::Word(&["normal", "uniform", "triangular", "lognormal"]),
            "kind of distribution",
            "\"normal\"",
        ),
        optional("sd", Shape::Quantity, "standard deviation", "0.01"),
        optional("half_width", Shape::Quantity, "half width", "0.02"),
        optional("from", Shape::Quantity, "lower end", "0.59"),
        optional("to", Shape::Quantity, "upper end", "0.63"),
        optional("mode", Shape::Quantity, "most likely value", "0.61"),
        optional(
            "factor",
            Shape::Number(1.0, 1e6),
            "the 95 % interval is median/factor to median·factor",
            "1.5",
        ),
        optional(
            "relative",
            Shape::Truth,
            "sizes are shares of the value",
            "true",
        ),
    ],
};

static FROM: Table = Table {
    name: "from",
    doc: "A result of another package.",
    keys: &[
        required(
            "package",
            Shape::Text,
            "folder of the package",
            "\"HS-217-CAL-003_B\"",
        ),
        required(
            "result",
            Shape::Symbol,
            "symbol of the result",
            "\"q_peak\"",
        ),
        required(
            "fingerprint",
            Shape::Digest,
            "content fingerprint of the package",
            "\"sha256:…\"",
        ),
    ],
};

static LOOKUP: Table = Table {
    name: "lookup",
    doc: "A tabulated function of one argument.",
    keys: &[
        required(
            "symbol",
            Shape::Symbol,
            "symbol by which it is called",
            "\"eta\"",
        ),
        required("meaning", Shape::Text, "meaning", "\"pump efficiency\""),
        required(
            "argument",
            Shape::Text,
            "words for axis and table head",
            "\"flow\"",
        ),
        required(
            "argument_unit",
            Shape::Unit,
            "unit of the argument",
            "\"m^3/s\"",
        ),
        required("unit", Shape::Unit, "unit of the value", "\"1\""),
        optional(
            "points",
            Shape::Points,
            "pairs, in these units",
            "[[0.0, 0.0], [0.02, 0.55]]",
        ),
        optional(
            "file",
            Shape::Path,
            "in place of points: a CSV file",
            "\"pump.csv\"",
        ),
        optional(
            "columns",
            Shape::Texts,
            "heads of its two columns",
            "[\"flow\", \"eff\"]",
        ),
        optional(
            "between",
            Shape::Word(&["linear", "monotone cubic", "step"]),
            "between points; linear without the key",
            "\"linear\"",
        ),
        optional(
            "outside",
            Shape::Word(&["refuse", "hold"]),
            "outside the points; refuse without the key",
            "\"refuse\"",
        ),
        optional(
            "factor",
            Shape::Symbol,
            "an input that multiplies the lookup",
            "\"f_eta\"",
        ),
        required("source", Shape::Text, "source", "\"R3\""),
    ],
};

static QUANTITY: Table = Table {
    name: "quantity",
    doc: "A named intermediate.",
    keys: &[
        required("symbol", Shape::Symbol, "symbol", "\"q_out\""),
        required(
            "meaning",
            Shape::Text,
            "meaning",
            "\"outflow through the outlet\"",
        ),
        required(
            "unit",
            Shape::Unit,
            "unit in which it is printed",
            "\"m^3/s\"",
        ),
        required(
            "formula",
            Shape::Formula,
            "formula",
            "\"C_d * A_o * sqrt(2 * g * max(h, 0))\"",
        ),
        optional(
            "source",
            Shape::Text,
            "where the equation comes from; required when issued",
            "\"R2\"",
        ),
    ],
};

static STATE: Table = Table {
    name: "state",
    doc: "A quantity that is marched.",
    keys: &[
        required("symbol", Shape::Symbol, "symbol", "\"h\""),
        required(
            "meaning",
            Shape::Text,
            "meaning",
            "\"water depth above the outlet centreline\"",
        ),
        required("unit", Shape::Unit, "unit in which it is printed", "\"m\""),
        required(
            "initial",
            Shape::Expression,
            "initial value: a quantity or a formula of inputs",
            "\"h_0\"",
        ),
        optional(
            "initial_source",
            Shape::Text,
            "source of an initial value given as a quantity",
            "\"R1\"",
        ),
        required(
            "rate",
            Shape::Formula,
            "rate per unit of the independent variable",
            "\"(q_in - q_out) / A_t\"",
        ),
        optional(
            "source",
            Shape::Text,
            "where the equation comes from; required when issued",
            "\"R2\"",
        ),
        optional(
            "within",
            Shape::Bounds,
            "leaving it stops the run with a finding",
            "[\"0 m\", \"4.5 m\"]",
        ),
        optional("scale", Shape::Quantity, "typical magnitude", "\"1 m\""),
    ],
};

static SWITCH: Table = Table {
    name: "switch",
    doc: "A discrete value changed only by events.",
    keys: &[
        required("symbol", Shape::Symbol, "symbol", "\"cooling\""),
        required("meaning", Shape::Text, "meaning", "\"jacket in service\""),
        required("initial", Shape::Number(-1e9, 1e9), "initial value", "1"),
    ],
};

static EVENT: Table = Table {
    name: "event",
    doc: "The instant at which a condition turns from false to true.",
    keys: &[
        required("id", Shape::Symbol, "id", "\"alarm\""),
        optional("text", Shape::Text, "what it means", "\"low-level alarm\""),
        required("when", Shape::Formula, "condition", "\"h < h_alarm\""),
        optional(
            "action",
            Shape::Word(&["note", "stop", "set"]),
            "what happens; note without the key",
            "\"stop\"",
        ),
        optional(
            "set",
            Shape::Assignments,
            "assignments of action set",
            "{ cooling = 0 }",
        ),
        optional(
            "once",
            Shape::Truth,
            "only the first occurrence acts",
            "true",
        ),
        optional(
            "at_start",
            Shape::Truth,
            "whether a condition true at the start is an event there",
            "false",
        ),
    ],
};

static MARCH: Table = Table {
    name: "march",
    doc: "How the equations are marched.",
    keys: &[
        required(
            "variable",
            Shape::Symbol,
            "symbol of the independent variable",
            "\"t\"",
        ),
        required("unit", Shape::Unit, "unit in which it is printed", "\"s\""),
        required("from", Shape::Expression, "start", "\"0 s\""),
        required("to", Shape::Expression, "end", "\"30 min\""),
        required(
            "method",
            Shape::Text,
            "name of the method; `countermarch methods` lists them",
            "\"heun\"",
        ),
        optional("step", Shape::Quantity, "step", "\"10 s\""),
        optional(
            "segments",
            Shape::Sections(&SEGMENT),
            "steps by segment",
            "[{ to = \"1 min\", step = \"0.5 s\" }]",
        ),
        optional(
            "grid_tolerance",
            Shape::Number(1e-14, 1.0),
            "the grid is chosen once to this tolerance",
            "1e-5",
        ),
        optional(
            "levels",
            Shape::Integer(3, 8),
            "levels of the ladder; 3 without the key",
            "3",
        ),
        optional(
            "target",
            Shape::Number(1e-14, 1.0),
            "relative numerical uncertainty to be reached by adding levels",
            "0.001",
        ),
        optional(
            "report_every",
            Shape::Quantity,
            "spacing of the printed table",
            "\"1 min\"",
        ),
    ],
};

static SEGMENT: Table = Table {
    name: "segment",
    doc: "A stretch of the span with its own step.",
    keys: &[
        required("to", Shape::Quantity, "end of the segment", "\"1 min\""),
        required("step", Shape::Quantity, "step in it", "\"0.5 s\""),
    ],
};

static RESULT: Table = Table {
    name: "result",
    doc: "A number that is wanted.",
    keys: &[
        required("symbol", Shape::Symbol, "symbol", "\"t_alarm\""),
        required(
            "meaning",
            Shape::Text,
            "meaning",
            "\"time at which the alarm is reached\"",
        ),
        required(
            "unit",
            Shape::Unit,
            "unit in which it is printed",
            "\"min\"",
        ),
        required(
            "formula",
            Shape::Formula,
            "formula with result functions",
            "\"time_of(alarm)\"",
        ),
        optional(
            "scale",
            Shape::Quantity,
            "typical magnitude, for relative statements",
            "\"30 min\"",
        ),
    ],
};

static CRITERION: Table = Table {
    name: "criterion",
    doc: "What a result must satisfy.",
    keys: &[
        required("id", Shape::Id, "id", "\"K1\""),
        required(
            "text",
            Shape::Text,
            "the criterion in words",
            "\"The alarm is reached no sooner than 12 min.\"",
        ),
        required(
            "result",
            Shape::Symbol,
            "the result that is judged",
            "\"t_alarm\"",
        ),
        optional("at_most", Shape::Expression, "upper limit", "\"3.2 m\""),
        optional("at_least", Shape::Expression, "lower limit", "\"12 min\""),
        optional(
            "between",
            Shape::Bounds,
            "both limits",
            "[\"1 m\", \"2 m\"]",
        ),
        required("source", Shape::Text, "basis of the limit", "\"R4\""),
        optional(
            "cases",
            Shape::Texts,
            "cases that it applies to; all without the key",
            "[\"base\"]",
        ),
        optional(
            "if_absent",
            Shape::Word(&["met", "not met"]),
            "finding when the result has no value because its event never occurred",
            "\"met\"",
        ),
    ],
};

static BALANCE: Table = Table {
    name: "balance",
    doc: "A quantity that must stay constant.",
    keys: &[
        required("id", Shape::Id, "id", "\"B1\""),
        required(
            "text",
            Shape::Text,
            "what is balanced",
            "\"volume of water\"",
        ),
        required(
            "formula",
            Shape::Formula,
            "formula",
            "\"A_t * h + integral(q_out) - integral(q_in)\"",
        ),
        required(
            "tolerance",
            Shape::Number(0.0, 1.0),
            "relative to the largest summand",
            "1e-6",
        ),
    ],
};

static CLOSED_FORM: Table = Table {
    name: "closed_form",
    doc: "A check value for a state's history or a result.",
    keys: &[
        optional(
            "result",
            Shape::Symbol,
            "result that is checked",
            "\"z_max\"",
        ),
        optional("state", Shape::Symbol, "state that is checked", "\"h\""),
        required(
            "formula",
            Shape::Formula,
            "formula",
            "\"Q_1 * sqrt(L / (g * A_t * A_s))\"",
        ),
        required(
            "kind",
            Shape::Word(&["exact", "estimate"]),
            "exact, or the estimate that a checker makes",
            "\"estimate\"",
        ),
        required(
            "tolerance",
            Shape::Number(0.0, 10.0),
            "relative; outside it is a finding",
            "0.05",
        ),
        optional("case", Shape::Id, "case; base without the key", "\"base\""),
        required("source", Shape::Text, "source", "\"R5\""),
    ],
};

static CASE: Table = Table {
    name: "case",
    doc: "A design case: other values of inputs.",
    keys: &[
        required("id", Shape::Id, "id", "\"low coefficient\""),
        required(
            "text",
            Shape::Text,
            "what it stands for",
            "\"Lower bound of the discharge coefficient\"",
        ),
        optional(
            "set",
            Shape::Assignments,
            "inputs with other values",
            "{ C_d = 0.59 }",
        ),
        optional(
            "lookups",
            Shape::Names,
            "lookups in place of others",
            "{ ramp = \"ramp_slow\" }",
        ),
        required("source", Shape::Text, "source", "\"R2\""),
        optional(
            "keep_spread",
            Shape::Texts,
            "inputs that keep their spread though set",
            "[\"C_d\"]",
        ),
    ],
};

static UNCERTAINTY: Table = Table {
    name: "uncertainty",
    doc: "Ensemble over the inputs that carry a spread.",
    keys: &[
        required(
            "samples",
            Shape::Integer(100, 10_000_000),
            "samples",
            "10000",
        ),
        required("seed", Shape::Integer(0, i64::MAX), "seed", "4127"),
        optional(
            "coverage",
            Shape::Number(0.5, 0.999),
            "coverage of intervals; 0.95 without the key",
            "0.95",
        ),
        optional(
            "sampling",
            Shape::Word(&["latin hypercube", "random"]),
            "sampling",
            "\"latin hypercube\"",
        ),
        optional(
            "cases",
            Shape::Word(&["base", "all"]),
            "cases with an ensemble",
            "\"all\"",
        ),
    ],
};

static CORRELATION: Table = Table {
    name: "correlation",
    doc: "Two correlated inputs.",
    keys: &[
        required("inputs", Shape::Texts, "the two inputs", "[\"a\", \"b\"]"),
        required(
            "coefficient",
            Shape::Number(-1.0, 1.0),
            "coefficient of correlation",
            "0.6",
        ),
    ],
};

static SITE: Table = Table {
    name: "site",
    doc: "Facts of the site.",
    keys: &[
        required(
            "ambient_pressure",
            Shape::Quantity,
            "ambient pressure, absolute",
            "\"101.325 kPa\"",
        ),
        optional("source", Shape::Text, "source", "\"R1\""),
    ],
};

static RECORD: Table = Table {
    name: "record",
    doc: "The look of the record.",
    keys: &[optional(
        "templates",
        Shape::Path,
        "folder of own templates and page style",
        "\"house\"",
    )],
};

static FIGURE: Table = Table {
    name: "figure",
    doc: "A figure over the independent variable.",
    keys: &[
        required("title", Shape::Text, "caption", "\"Depth and outflow\""),
        required(
            "show",
            Shape::Texts,
            "states and quantities",
            "[\"h\", \"q_out\"]",
        ),
        optional("mark", Shape::Texts, "events to be marked", "[\"alarm\"]"),
    ],
};

static SKETCH: Table = Table {
    name: "sketch",
    doc: "A picture of the system.",
    keys: &[
        required(
            "file",
            Shape::Path,
            "PNG, JPEG or SVG file",
            "\"layout.svg\"",
        ),
        required(
            "caption",
            Shape::Text,
            "caption",
            "\"Tank T-12 and its emergency outlet\"",
        ),
    ],
};

static ATTACHMENT: Table = Table {
    name: "attachment",
    doc: "A source document to be archived; never parsed.",
    keys: &[
        required("file", Shape::Path, "file", "\"pump-curve.pdf\""),
        required("text", Shape::Text, "what it is", "\"Supplier's curve\""),
    ],
};

static VALIDATION: Table = Table {
    name: "validation",
    doc: "Comparison of the model with test or field data.",
    keys: &[
        required(
            "text",
            Shape::Text,
            "what was compared, with what outcome",
            "\"…\"",
        ),
        required("source", Shape::Text, "source", "\"R6\""),
    ],
};

static KNOWN_ERROR: Table = Table {
    name: "known_error",
    doc: "An erratum of program or source that was considered.",
    keys: &[
        required("text", Shape::Text, "the error", "\"…\""),
        required("bearing", Shape::Text, "why it bears, or does not", "\"…\""),
    ],
};

static COMMENT: Table = Table {
    name: "comment",
    doc: "A comment of the check cycle.",
    keys: &[
        required("id", Shape::Id, "id", "\"Q1\""),
        required("by", Shape::Text, "who made it", "\"checker\""),
        optional("on", Shape::Text, "what it is about", "\"input C_d\""),
        required(
            "text",
            Shape::Text,
            "comment",
            "\"State the source of the range.\"",
        ),
        optional(
            "response",
            Shape::Text,
            "response",
            "\"Added R2, table 4.\"",
        ),
        required(
            "standing",
            Shape::Word(&["open", "answered", "closed"]),
            "standing",
            "\"closed\"",
        ),
    ],
};

impl Table {
    pub fn key(&self, name: &str) -> Option<&'static Key> {
        self.keys.iter().find(|key| key.name == name)
    }

    /// `[calculation]`, or "the problem file".
    pub fn title(&self) -> String {
        if self.name.is_empty() {
            "the problem file".to_owned()
        } else {
            format!("[{}]", self.name)
        }
    }
}
