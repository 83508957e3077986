//! Customary units: inch-pound, older metric and trade units; names that stand for several.
//!
//! Exact factors are worked from the international yard and pound (1 yd = 0.9144 m, 1 lb =
//! 0.453 592 37 kg; Federal Register 24, 5348, 1959) and from standard gravity 9.806 65 m/s²; then
//! the note after the table number says how. NIST SP 811 prints them to seven digits. Columns of
//! liquid are the conventional ones: 1000 kg/m³ for water, 13 595.1 kg/m³ for mercury.

use super::super::kinds::*;
use super::{Entry, Scale, row};

const EXACT: &str = "NIST SP 811 (2008), B.8, exact";
const CITED: &str = "NIST SP 811 (2008), B.8, to the digits given";
const YARD: &str = "NIST SP 811 (2008), B.8; exact from yd = 0.9144 m";
const POUND: &str = "NIST SP 811 (2008), B.8; exact from lb = 0.453 592 37 kg";
const GALLON: &str = "NIST SP 811 (2008), B.8; exact, gal(US) = 231 in³, gal(UK) = 4.546 09 L";
const POUND_FORCE: &str = "NIST SP 811 (2008), B.8; exact from lb and 9.806 65 m/s²";
const WATER: &str = "NIST SP 811 (2008), B.8, conventional: 1000 kg/m³ and 9.806 65 m/s²";
const MERCURY: &str = "NIST SP 811 (2008), B.8, conventional: 13 595.1 kg/m³ and 9.806 65 m/s²";

#[rustfmt::skip]
pub(super) const UNITS: &[Entry] = &[
    // symbol, print, name, dimension, numerator, denominator, source
    row("in",            "in",            "inch",                     LENGTH, "0.0254", "1", YARD),
    row("ft",            "ft",            "foot",                     LENGTH, "0.3048", "1", YARD),
    row("yd",            "yd",            "yard",                     LENGTH, "0.9144", "1", YARD),
    row("mi",            "mi",            "mile",                     LENGTH, "1609.344", "1", YARD),
    row("mil(length)",   "mil",           "thousandth of an inch",    LENGTH, "0.0000254", "1", YARD),
    row("ft(survey)",    "ft(survey)",    "US survey foot",           LENGTH, "1200", "3937", "NIST SP 811 (2008), B.6, exact; not in use since 2023"),
    row("nmi",           "nmi",           "nautical mile",            LENGTH, "1852", "1", EXACT),
    row("angstrom",      "Å",             "ångström",                 LENGTH, "1e-10", "1", EXACT),
    row("acre",          "acre",          "acre",                     AREA, "4046.8564224", "1", "4840 yd², on the international foot; exact from yd = 0.9144 m"),
    row("barn",          "b",             "barn",                     AREA, "1e-28", "1", EXACT).prefixed(),
    row("darcy",         "darcy",         "darcy",                    AREA, "1e-7", "101325", "NIST SP 811 (2008), B.8; exact, 1 cP·(cm/s)·cm/atm").prefixed(),
    row("gal(US)",       "gal(US)",       "US gallon",                VOLUME, "0.003785411784", "1", GALLON),
    row("gal(UK)",       "gal(UK)",       "imperial gallon",          VOLUME, "0.00454609", "1", GALLON),
    row("qt(US)",        "qt(US)",        "US liquid quart",          VOLUME, "0.000946352946", "1", GALLON),
    row("qt(UK)",        "qt(UK)",        "imperial quart",           VOLUME, "0.0011365225", "1", GALLON),
    row("pt(US)",        "pt(US)",        "US liquid pint",           VOLUME, "0.000473176473", "1", GALLON),
    row("pt(UK)",        "pt(UK)",        "imperial pint",            VOLUME, "0.00056826125", "1", GALLON),
    row("floz(US)",      "fl oz(US)",     "US fluid ounce",           VOLUME, "0.0000295735295625", "1", GALLON),
    row("floz(UK)",      "fl oz(UK)",     "imperial fluid ounce",     VOLUME, "0.0000284130625", "1", GALLON),
    row("bbl(oil)",      "bbl(oil)",      "barrel of oil",            VOLUME, "0.158987294928", "1", "NIST SP 811 (2008), B.8; exact, 42 gal(US)"),

    row("lb",            "lb",            "pound",                    MASS, "0.45359237", "1", POUND),
    row("oz(av)",        "oz(av)",        "avoirdupois ounce",        MASS, "0.028349523125", "1", POUND),
    row("oz(troy)",      "oz(troy)",      "troy ounce",               MASS, "0.0311034768", "1", POUND),
    row("gr",            "gr",            "grain",                    MASS, "0.00006479891", "1", POUND),
    row("slug",          "slug",          "slug",                     MASS, "4.4482216152605", "0.3048", POUND_FORCE),
    row("ton(short)",    "ton(short)",    "short ton",                MASS, "907.18474", "1", POUND),
    row("ton(long)",     "ton(long)",     "long ton",                 MASS, "1016.0469088", "1", POUND),
    row("lbmol",         "lbmol",         "pound-mole",               AMOUNT, "453.59237", "1", "lb/g moles; exact from lb = 0.453 592 37 kg"),

    row("yr(365d)",      "yr(365 d)",     "year of 365 days",         TIME, "31536000", "1", EXACT),
    row("yr(Julian)",    "yr(Julian)",    "Julian year",              TIME, "31557600", "1", "365.25 days"),
    row("knot",          "knot",          "knot",                     SPEED, "1852", "3600", EXACT),
    row("Gal",           "Gal",           "gal (acceleration)",       ACCELERATION, "0.01", "1", EXACT).prefixed(),
    row("gn",            "gn",            "standard gravity",         ACCELERATION, "9.80665", "1", EXACT),
    row("mil(angle)",    "mil(angle)",    "artillery mil",            NUMBER, "2 pi", "6400", "NIST SP 811 (2008), B.8; a 6400th of a revolution"),

    row("lbf",           "lbf",           "pound-force",              FORCE, "4.4482216152605", "1", POUND_FORCE),
    row("kip",           "kip",           "kilopound-force",          FORCE, "4448.2216152605", "1", POUND_FORCE),
    row("tonf(short)",   "tonf(short)",   "short ton-force",          FORCE, "8896.443230521", "1", POUND_FORCE),
    row("tonf(long)",    "tonf(long)",    "long ton-force",           FORCE, "9964.01641818352", "1", POUND_FORCE),
    row("ozf",           "ozf",           "ounce-force",              FORCE, "0.27801385095378125", "1", POUND_FORCE),
    row("pdl",           "pdl",           "poundal",                  FORCE, "0.138254954376", "1", POUND),
    row("kgf",           "kgf",           "kilogram-force",           FORCE, "9.80665", "1", EXACT),
    row("dyn",           "dyn",           "dyne",                     FORCE, "1e-5", "1", EXACT),

    row("psi",           "psi",           "pound-force per square inch", PRESSURE, "4.4482216152605", "0.00064516", POUND_FORCE),
    row("ksi",           "ksi",           "kip per square inch",      PRESSURE, "4448.2216152605", "0.00064516", POUND_FORCE),
    row("atm",           "atm",           "standard atmosphere",      PRESSURE, "101325", "1", EXACT),
    row("at",            "at",            "technical atmosphere",     PRESSURE, "98066.5", "1", EXACT),
    row("Torr",          "Torr",          "torr",                     PRESSURE, "101325", "760", EXACT).prefixed(),
    row("mmHg",          "mmHg",          "millimetre of mercury",    PRESSURE, "133.322387415", "1", MERCURY),
    row("inHg",          "inHg",          "inch of mercury",          PRESSURE, "3386.388640341", "1", MERCURY),
    row("mmH2O",         "mmH₂O",         "millimetre of water",      PRESSURE, "9.80665", "1", WATER),
    row("mH2O",          "mH₂O",          "metre of water",           PRESSURE, "9806.65", "1", WATER),
    row("ftH2O",         "ftH₂O",         "foot of water",            PRESSURE, "2989.06692", "1", WATER),
    row("inH2O(conv)",   "inH₂O(conv)",   "inch of water, conventional", PRESSURE, "249.08891", "1", WATER),
    row("inH2O(4degC)",  "inH₂O(4 °C)",   "inch of water at 4 °C",    PRESSURE, "249.082", "1", CITED),
    row("inH2O(60degF)", "inH₂O(60 °F)",  "inch of water at 60 °F",   PRESSURE, "248.84", "1", CITED),

    row("erg",           "erg",           "erg",                      ENERGY, "1e-7", "1", EXACT),
    row("cal(th)",       "cal(th)",       "thermochemical calorie",   ENERGY, "4.184", "1", EXACT).prefixed(),
    row("cal(IT)",       "cal(IT)",       "International Table calorie", ENERGY, "4.1868", "1", EXACT).prefixed(),
    row("Btu(IT)",       "Btu(IT)",       "International Table British thermal unit", ENERGY, "1055.05585262", "1", "NIST SP 811 (2008), B.8, footnote; exact from cal(IT), lb and degF"),
    row("Btu(th)",       "Btu(th)",       "thermochemical British thermal unit", ENERGY, "9489.1523804", "9", "NIST SP 811 (2008), B.8; exact from cal(th), lb and degF"),
    row("therm(US)",     "therm(US)",     "US therm",                 ENERGY, "105480400", "1", EXACT),
    row("therm(EC)",     "therm(EC)",     "European therm",           ENERGY, "105506000", "1", EXACT),
    row("ton(TNT)",      "ton(TNT)",      "ton of TNT",               ENERGY, "4184000000", "1", CITED),

    row("hp(mech)",      "hp(mech)",      "mechanical horsepower",    POWER, "745.69987158227022", "1", "NIST SP 811 (2008), B.8; exact, 550 ft·lbf/s"),
    row("hp(metric)",    "hp(metric)",    "metric horsepower",        POWER, "735.49875", "1", "NIST SP 811 (2008), B.8; exact, 75 kgf·m/s"),
    row("hp(elec)",      "hp(elec)",      "electric horsepower",      POWER, "746", "1", EXACT),
    row("hp(boiler)",    "hp(boiler)",    "boiler horsepower",        POWER, "9809.5", "1", CITED),
    row("ton(refrig)",   "ton(refrig)",   "ton of refrigeration",     POWER, "10550.5585262", "3", "NIST SP 811 (2008), B.8; exact, 12 000 Btu(IT)/h"),

    row("P",             "P",             "poise",                    DYNAMIC_VISCOSITY, "0.1", "1", EXACT).prefixed(),
    row("St",            "St",            "stokes",                   KINEMATIC_VISCOSITY, "0.0001", "1", EXACT).prefixed(),
    row("degR",          "°R",            "degree Rankine",           TEMPERATURE, "5", "9", EXACT),
    row("degF",          "°F",            "degree Fahrenheit",        TEMPERATURE, "5", "9", EXACT)
        .on_scale(Scale::Temperature { offset: 459.67, difference: "degR" }),

    row("Ci",            "Ci",            "curie",                    FREQUENCY, "3.7e10", "1", EXACT).prefixed(),
    row("rem",           "rem",           "rem",                      ABSORBED_DOSE, "0.01", "1", EXACT).prefixed(),
    row("rad(dose)",     "rad(dose)",     "rad (absorbed dose)",      ABSORBED_DOSE, "0.01", "1", EXACT).prefixed(),
    row("roentgen",      "R",             "roentgen",                 EXPOSURE, "0.000258", "1", EXACT),
    row("gauss",         "G",             "gauss",                    FLUX_DENSITY, "0.0001", "1", EXACT),
    row("Mx",            "Mx",            "maxwell",                  MAGNETIC_FLUX, "1e-8", "1", EXACT),
    row("Oe",            "Oe",            "oersted",                  MAGNETIC_FIELD, "250", "pi", "NIST SP 811 (2008), B.8; 1000/(4π) A/m"),
];

/// Names that stand for several units, and the qualified ones.
#[rustfmt::skip]
pub(in crate::units) const AMBIGUOUS: &[(&str, &[&str])] = &[
    ("gal",   &["gal(US)", "gal(UK)"]),
    ("gallon", &["gal(US)", "gal(UK)"]),
    ("qt",    &["qt(US)", "qt(UK)"]),
    ("pt",    &["pt(US)", "pt(UK)"]),
    ("floz",  &["floz(US)", "floz(UK)"]),
    ("oz",    &["oz(av)", "oz(troy)", "ozf", "floz(US)", "floz(UK)"]),
    ("bbl",   &["bbl(oil)", "gal(US)"]),
    ("ton",   &["t", "ton(short)", "ton(long)", "ton(refrig)", "ton(TNT)", "tonf(short)", "tonf(long)"]),
    ("tons",  &["t", "ton(short)", "ton(long)", "ton(refrig)", "ton(TNT)", "tonf(short)", "tonf(long)"]),
    ("tonf",  &["tonf(short)", "tonf(long)", "kN"]),
    ("kt",    &["knot", "Gg"]),
    ("pound", &["lb", "lbf"]),
    ("pounds", &["lb", "lbf"]),
    ("ounce", &["oz(av)", "oz(troy)", "floz(US)", "floz(UK)"]),
    ("cal",   &["cal(th)", "cal(IT)"]),
    ("Cal",   &["kcal(th)", "kcal(IT)"]),
    ("kcal",  &["kcal(th)", "kcal(IT)"]),
    ("Btu",   &["Btu(IT)", "Btu(th)"]),
    ("BTU",   &["Btu(IT)", "Btu(th)"]),
    ("MMBtu", &["Btu(IT)", "Btu(th)"]),
    ("therm", &["therm(US)", "therm(EC)"]),
    ("hp",    &["hp(mech)", "hp(metric)", "hp(elec)", "hp(boiler)"]),
    ("HP",    &["hp(mech)", "hp(metric)", "hp(elec)", "hp(boiler)"]),
    ("mil",   &["mil(length)", "mil(angle)", "mm"]),
    ("mils",  &["mil(length)", "mil(angle)", "mm"]),
    ("inH2O", &["inH2O(conv)", "inH2O(4degC)", "inH2O(60degF)"]),
    ("inWC",  &["inH2O(conv)", "inH2O(4degC)", "inH2O(60degF)"]),
    ("a",     &["yr(365d)", "yr(Julian)"]),
    ("yr",    &["yr(365d)", "yr(Julian)"]),
    ("year",  &["yr(365d)", "yr(Julian)"]),
    ("years", &["yr(365d)", "yr(Julian)"]),
    ("G",     &["gauss", "gn"]),
    ("R",     &["roentgen", "degR"]),
];
