//! SI units, SI prefixes, and the units accepted for use with the SI.

use super::super::kinds::*;
use super::{Entry, Prefix, Scale, row};

const TABLE_2: &str = "SI Brochure, 9th ed., table 2";
const TABLE_4: &str = "SI Brochure, 9th ed., table 4";
const TABLE_8: &str = "SI Brochure, 9th ed., table 8";
const B_8: &str = "NIST SP 811 (2008), B.8";
const IEC: &str = "IEC 80000-6, from volt and ampere";
const GAUGE: &str = "above ambient pressure; factor of the unit without (g)";

#[rustfmt::skip]
pub(super) const UNITS: &[Entry] = &[
    // symbol, print, name, dimension, numerator, denominator, source
    row("m",      "m",      "metre",           LENGTH,              "1", "1", TABLE_2).prefixed(),
    row("g",      "g",      "gram",            MASS,                "1", "1000", TABLE_2).prefixed(),
    row("s",      "s",      "second",          TIME,                "1", "1", TABLE_2).prefixed(),
    row("A",      "A",      "ampere",          CURRENT,             "1", "1", TABLE_2).prefixed(),
    row("K",      "K",      "kelvin",          TEMPERATURE,         "1", "1", TABLE_2).prefixed(),
    row("mol",    "mol",    "mole",            AMOUNT,              "1", "1", TABLE_2).prefixed(),
    row("cd",     "cd",     "candela",         LUMINOUS_INTENSITY,  "1", "1", TABLE_2).prefixed(),

    row("rad",    "rad",    "radian",          NUMBER,              "1", "1", TABLE_4).prefixed(),
    row("sr",     "sr",     "steradian",       NUMBER,              "1", "1", TABLE_4),
    row("Hz",     "Hz",     "hertz",           FREQUENCY,           "1", "1", TABLE_4).prefixed(),
    row("N",      "N",      "newton",          FORCE,               "1", "1", TABLE_4).prefixed(),
    row("Pa",     "Pa",     "pascal",          PRESSURE,            "1", "1", TABLE_4).prefixed(),
    row("J",      "J",      "joule",           ENERGY,              "1", "1", TABLE_4).prefixed(),
    row("W",      "W",      "watt",            POWER,               "1", "1", TABLE_4).prefixed(),
    row("C",      "C",      "coulomb",         CHARGE,              "1", "1", TABLE_4).prefixed(),
    row("V",      "V",      "volt",            VOLTAGE,             "1", "1", TABLE_4).prefixed(),
    row("F",      "F",      "farad",           CAPACITANCE,         "1", "1", TABLE_4).prefixed(),
    row("ohm",    "Ω",      "ohm",             RESISTANCE,          "1", "1", TABLE_4).prefixed(),
    row("S",      "S",      "siemens",         CONDUCTANCE,         "1", "1", TABLE_4).prefixed(),
    row("Wb",     "Wb",     "weber",           MAGNETIC_FLUX,       "1", "1", TABLE_4).prefixed(),
    row("T",      "T",      "tesla",           FLUX_DENSITY,        "1", "1", TABLE_4).prefixed(),
    row("H",      "H",      "henry",           INDUCTANCE,          "1", "1", TABLE_4).prefixed(),
    row("degC",   "°C",     "degree Celsius",  TEMPERATURE,         "1", "1", TABLE_4)
        .on_scale(Scale::Temperature { offset: 273.15, difference: "K" }),
    row("lm",     "lm",     "lumen",           LUMINOUS_INTENSITY,  "1", "1", TABLE_4).prefixed(),
    row("lx",     "lx",     "lux",             ILLUMINANCE,         "1", "1", TABLE_4).prefixed(),
    row("Bq",     "Bq",     "becquerel",       FREQUENCY,           "1", "1", TABLE_4).prefixed(),
    row("Gy",     "Gy",     "gray",            ABSORBED_DOSE,       "1", "1", TABLE_4).prefixed(),
    row("Sv",     "Sv",     "sievert",         ABSORBED_DOSE,       "1", "1", TABLE_4).prefixed(),
    row("kat",    "kat",    "katal",           CATALYTIC_ACTIVITY,  "1", "1", TABLE_4).prefixed(),

    row("min",    "min",    "minute",          TIME,                "60", "1", TABLE_8),
    row("h",      "h",      "hour",            TIME,                "3600", "1", TABLE_8),
    row("d",      "d",      "day",             TIME,                "86400", "1", TABLE_8),
    row("au",     "au",     "astronomical unit", LENGTH,            "149597870700", "1", TABLE_8),
    row("deg",    "°",      "degree of angle", NUMBER,              "pi", "180", TABLE_8),
    row("arcmin", "′",      "minute of angle", NUMBER,              "pi", "10800", TABLE_8),
    row("arcsec", "″",      "second of angle", NUMBER,              "pi", "648000", TABLE_8),
    row("ha",     "ha",     "hectare",         AREA,                "10000", "1", TABLE_8),
    row("L",      "L",      "litre",           VOLUME,              "1", "1000", TABLE_8).prefixed(),
    row("t",      "t",      "tonne",           MASS,                "1000", "1", TABLE_8).prefixed(),
    row("Da",     "Da",     "dalton",          MASS,                "1.66053906660e-27", "1", TABLE_8).prefixed(),
    row("u",      "u",      "unified atomic mass unit", MASS,       "1.66053906660e-27", "1", TABLE_8),
    row("eV",     "eV",     "electronvolt",    ENERGY,              "1.602176634e-19", "1", TABLE_8).prefixed(),

    row("%",      "%",      "per cent",        NUMBER,              "1", "100", "SI Brochure, 9th ed., 5.4.7"),
    row("ppm",    "ppm",    "part per million", NUMBER,             "1", "1000000", "SI Brochure, 9th ed., 5.4.7"),
    row("rev",    "rev",    "revolution",      NUMBER,              "2 pi", "1", B_8),
    row("gon",    "gon",    "gon",             NUMBER,              "pi", "200", B_8),
    row("bar",    "bar",    "bar",             PRESSURE,            "100000", "1", B_8).prefixed(),
    row("VA",     "VA",     "voltampere",      POWER,               "1", "1", IEC).prefixed(),
    row("var",    "var",    "var",             POWER,               "1", "1", IEC).prefixed(),
    row("Wh",     "Wh",     "watt hour",       ENERGY,              "3600", "1", B_8).prefixed(),
    row("Ah",     "Ah",     "ampere hour",     CHARGE,              "3600", "1", B_8).prefixed(),
    row("wk",     "wk",     "week",            TIME,                "604800", "1", "7 days"),

    row("Pa(g)",  "Pa(g)",  "pascal, gauge",   PRESSURE,            "1", "1", GAUGE).on_scale(Scale::Gauge).prefixed(),
    row("bar(g)", "bar(g)", "bar, gauge",      PRESSURE,            "100000", "1", GAUGE).on_scale(Scale::Gauge).prefixed(),
    row("psi(g)", "psi(g)", "pound-force per square inch, gauge", PRESSURE, "4.4482216152605", "0.00064516", GAUGE)
        .on_scale(Scale::Gauge),
];

/// SI Brochure, 9th ed., table 7, with the four of 2022 (CGPM, 27th meeting, resolution 3).
#[rustfmt::skip]
pub(super) const PREFIXES: &[Prefix] = &[
    Prefix { symbol: "q",  print: "q",  name: "quecto", power: -30 },
    Prefix { symbol: "r",  print: "r",  name: "ronto",  power: -27 },
    Prefix { symbol: "y",  print: "y",  name: "yocto",  power: -24 },
    Prefix { symbol: "z",  print: "z",  name: "zepto",  power: -21 },
    Prefix { symbol: "a",  print: "a",  name: "atto",   power: -18 },
    Prefix { symbol: "f",  print: "f",  name: "femto",  power: -15 },
    Prefix { symbol: "p",  print: "p",  name: "pico",   power: -12 },
    Prefix { symbol: "n",  print: "n",  name: "nano",   power: -9 },
    Prefix { symbol: "u",  print: "µ",  name: "micro",  power: -6 },
    Prefix { symbol: "m",  print: "m",  name: "milli",  power: -3 },
    Prefix { symbol: "c",  print: "c",  name: "centi",  power: -2 },
    Prefix { symbol: "d",  print: "d",  name: "deci",   power: -1 },
    Prefix { symbol: "da", print: "da", name: "deca",   power: 1 },
    Prefix { symbol: "h",  print: "h",  name: "hecto",  power: 2 },
    Prefix { symbol: "k",  print: "k",  name: "kilo",   power: 3 },
    Prefix { symbol: "M",  print: "M",  name: "mega",   power: 6 },
    Prefix { symbol: "G",  print: "G",  name: "giga",   power: 9 },
    Prefix { symbol: "T",  print: "T",  name: "tera",   power: 12 },
    Prefix { symbol: "P",  print: "P",  name: "peta",   power: 15 },
    Prefix { symbol: "E",  print: "E",  name: "exa",    power: 18 },
    Prefix { symbol: "Z",  print: "Z",  name: "zetta",  power: 21 },
    Prefix { symbol: "Y",  print: "Y",  name: "yotta",  power: 24 },
    Prefix { symbol: "R",  print: "R",  name: "ronna",  power: 27 },
    Prefix { symbol: "Q",  print: "Q",  name: "quetta", power: 30 },
];
