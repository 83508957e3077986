//! Our catalogue against two independent tables: `runits` (the definitions of pint 0.26.2) and
//! `octofhir-ucum` (the UCUM essence file, version 2.2). Both are used in tests only.

use super::super::*;

#[derive(Clone, Copy, Debug, PartialEq)]
enum Table {
    Runits,
    Ucum,
}

/// Ours, in `runits`, in UCUM; `-` where that table has no such unit.
const NAMES: &[(&str, &str, &str)] = &[
    ("m", "m", "m"),
    ("g", "g", "g"),
    ("s", "s", "s"),
    ("A", "A", "A"),
    ("K", "K", "K"),
    ("mol", "mol", "mol"),
    ("cd", "cd", "cd"),
    ("rad", "rad", "rad"),
    ("sr", "sr", "sr"),
    ("Hz", "Hz", "Hz"),
    ("N", "N", "N"),
    ("Pa", "Pa", "Pa"),
    ("J", "J", "J"),
    ("W", "W", "W"),
    ("C", "C", "C"),
    ("V", "V", "V"),
    ("F", "F", "F"),
    ("ohm", "ohm", "Ohm"),
    ("S", "S", "S"),
    ("Wb", "Wb", "Wb"),
    ("T", "T", "T"),
    ("H", "H", "H"),
    ("degC", "degC", "Cel"),
    ("lm", "lm", "lm"),
    ("lx", "lx", "lx"),
    ("Bq", "Bq", "Bq"),
    ("Gy", "Gy", "Gy"),
    ("Sv", "Sv", "Sv"),
    ("kat", "kat", "kat"),
    ("min", "min", "min"),
    ("h", "h", "h"),
    ("d", "d", "d"),
    ("au", "au", "AU"),
    ("deg", "deg", "deg"),
    ("arcmin", "arcmin", "'"),
    ("arcsec", "arcsec", "''"),
    ("ha", "hectare", "har"),
    ("L", "L", "L"),
    ("t", "t", "t"),
    ("Da", "Da", "u"),
    ("u", "u", "u"),
    ("eV", "eV", "eV"),
    ("%", "%", "%"),
    ("ppm", "ppm", "[ppm]"),
    ("rev", "revolution", "circ"),
    ("gon", "gon", "gon"),
    ("bar", "bar", "bar"),
    ("VA", "VA", "V.A"),
    ("var", "-", "V.A"),
    ("Wh", "Wh", "W.h"),
    ("Ah", "Ah", "A.h"),
    ("wk", "week", "wk"),
    ("in", "in", "[in_i]"),
    ("ft", "ft", "[ft_i]"),
    ("yd", "yd", "[yd_i]"),
    ("mi", "mi", "[mi_i]"),
    ("mil(length)", "thou", "[mil_i]"),
    ("ft(survey)", "survey_foot", "[ft_us]"),
    ("nmi", "nmi", "[nmi_i]"),
    ("angstrom", "angstrom", "Ao"),
    ("acre", "acre", "4840.[yd_i]2"),
    ("barn", "barn", "b"),
    ("darcy", "darcy", "-"),
    ("gal(US)", "US_liquid_gallon", "[gal_us]"),
    ("gal(UK)", "imperial_gallon", "[gal_br]"),
    ("qt(US)", "US_liquid_quart", "[qt_us]"),
    ("qt(UK)", "imperial_quart", "[qt_br]"),
    ("pt(US)", "US_pint", "[pt_us]"),
    ("pt(UK)", "imperial_pint", "[pt_br]"),
    ("floz(US)", "US_fluid_ounce", "[foz_us]"),
    ("floz(UK)", "imperial_fluid_ounce", "[foz_br]"),
    ("bbl(oil)", "oil_bbl", "[bbl_us]"),
    ("lb", "lb", "[lb_av]"),
    ("oz(av)", "oz", "[oz_av]"),
    ("oz(troy)", "troy_ounce", "[oz_tr]"),
    ("gr", "grain", "[gr]"),
    ("slug", "slug", "[lbf_av].s2/[ft_i]"),
    ("ton(short)", "short_ton", "[ston_av]"),
    ("ton(long)", "long_ton", "[lton_av]"),
    ("yr(Julian)", "julian_year", "a_j"),
    ("knot", "knot", "[kn_i]"),
    ("Gal", "galileo", "Gal"),
    ("gn", "standard_gravity", "[g]"),
    ("mil(angle)", "mil", "circ/6400"),
    ("lbf", "lbf", "[lbf_av]"),
    ("kip", "kip", "1000.[lbf_av]"),
    ("tonf(short)", "force_short_ton", "2000.[lbf_av]"),
    ("tonf(long)", "force_long_ton", "2240.[lbf_av]"),
    ("ozf", "force_ounce", "[lbf_av]/16"),
    ("pdl", "poundal", "[lb_av].[ft_i]/s2"),
    ("kgf", "kgf", "kgf"),
    ("dyn", "dyn", "dyn"),
    ("psi", "psi", "[psi]"),
    ("ksi", "ksi", "1000.[psi]"),
    ("atm", "atm", "atm"),
    ("at", "technical_atmosphere", "att"),
    ("Torr", "torr", "atm/760"),
    ("mmHg", "mmHg", "mm[Hg]"),
    ("inHg", "inHg", "[in_i'Hg]"),
    ("mmH2O", "-", "mm[H2O]"), // runits reads no name with a digit inside
    ("mH2O", "-", "m[H2O]"),
    ("ftH2O", "-", "12.[in_i'H2O]"),
    ("inH2O(conv)", "-", "[in_i'H2O]"),
    ("erg", "erg", "erg"),
    ("cal(th)", "cal", "cal_th"),
    ("cal(IT)", "cal_it", "cal_IT"),
    ("Btu(IT)", "Btu_it", "[Btu_IT]"),
    ("Btu(th)", "Btu_th", "[Btu_th]"),
    ("therm(US)", "US_therm", "-"),
    ("therm(EC)", "EC_therm", "-"),
    ("ton(TNT)", "ton_TNT", "-"),
    ("hp(mech)", "hp", "[HP]"),
    ("hp(metric)", "metric_horsepower", "75.kgf.m/s"),
    ("hp(elec)", "electrical_horsepower", "746.W"),
    ("hp(boiler)", "boiler_horsepower", "-"),
    ("ton(refrig)", "refrigeration_ton", "12000.[Btu_IT]/h"),
    ("P", "poise", "P"),
    ("St", "stokes", "St"),
    ("degR", "degR", "[degR]"),
    ("degF", "degF", "[degF]"),
    ("Ci", "curie", "Ci"),
    ("rem", "rem", "REM"),
    ("rad(dose)", "rads", "RAD"),
    ("roentgen", "roentgen", "R"),
    ("gauss", "-", "G"), // runits has no Gaussian units
    ("Mx", "-", "Mx"),
    ("Oe", "-", "Oe"),
    ("lbmol", "-", "45359237.mol/100000"),
    ("yr(365d)", "common_year", "365.d"),
    ("inH2O(4degC)", "-", "-"), // by hand, see below
    ("inH2O(60degF)", "-", "-"),
];

/// Where a table differs from ours: its relative difference, and why.
const DIFFERENCES: &[(&str, Table, f64, &str)] = &[
    (
        "Da",
        Table::Runits,
        1.4e-9,
        "CODATA 2022; ours is the value of the SI Brochure, CODATA 2018",
    ),
    ("u", Table::Runits, 1.4e-9, "as Da"),
    (
        "au",
        Table::Ucum,
        -6.0e-11,
        "the value before IAU resolution B2 of 2012",
    ),
    ("mmHg", Table::Ucum, -2.9e-6, "rounded to 133.322 Pa"),
    ("inHg", Table::Ucum, -2.9e-6, "as mmHg"),
    ("Btu(th)", Table::Ucum, -2.5e-7, "rounded to 1054.350 J"),
    (
        "therm(EC)",
        Table::Runits,
        -3.8e-6,
        "100 000 Btu of 1055.056 J; SP 811 has 1.055 06e8 J",
    ),
    (
        "hp(boiler)",
        Table::Runits,
        1.1e-4,
        "33 475 Btu/h of 1055.056 J; SP 811 has 9809.50 W",
    ),
    (
        "ton(refrig)",
        Table::Runits,
        1.4e-7,
        "Btu of 1055.056 J (ISO)",
    ),
];

#[test]
fn val_every_factor_against_two_tables() {
    let mut differences_seen = 0;
    for (ours, runits_name, ucum_code) in NAMES {
        let unit = Unit::parse(ours).unwrap();
        let value = unit.to_si(1.0, None).unwrap();
        let outside = [
            (
                Table::Runits,
                *runits_name,
                by_runits as fn(&str, &Unit) -> f64,
            ),
            (Table::Ucum, *ucum_code, by_ucum),
        ];
        for (table, name, convert) in outside {
            if name == "-" {
                continue;
            }
            let theirs = convert(name, &unit);
            let relative = theirs / value - 1.0;
            let known = DIFFERENCES
                .iter()
                .find(|row| row.0 == *ours && row.1 == table);
            if let Some((_, _, difference, _)) = known {
                differences_seen += 1;
                assert!(
                    (relative / difference - 1.0).abs() < 0.05,
                    "{ours} {table:?} {relative:e}"
                );
            } else {
                assert!(
                    relative.abs() < 1e-15,
                    "{ours}: {value}, in {table:?} {theirs}"
                );
            }
        }
    }
    assert_eq!(differences_seen, DIFFERENCES.len());
}

#[test]
fn val_the_cross_check_leaves_no_unit_out() {
    for entry in catalogue().filter(|entry| entry.scale != Scale::Gauge) {
        let rows = NAMES
            .iter()
            .filter(|(ours, _, _)| *ours == entry.symbol)
            .count();
        assert_eq!(rows, 1, "{}", entry.symbol);
    }
    let by_neither: Vec<&str> = NAMES
        .iter()
        .filter(|row| row.1 == "-" && row.2 == "-")
        .map(|row| row.0)
        .collect();
    assert_eq!(by_neither, ["inH2O(4degC)", "inH2O(60degF)"]);
}

/// All but the four of 2022 (quecto, ronto, ronna, quetta), which UCUM does not have yet.
#[test]
fn val_prefixes_against_ucum() {
    let theirs = octofhir_ucum::get_all_prefixes();
    let before_2022: Vec<&Prefix> = prefixes()
        .filter(|prefix| prefix.power.abs() <= 24)
        .collect();
    assert_eq!(before_2022.len(), 20);
    for prefix in before_2022 {
        let outside = theirs
            .iter()
            .find(|outside| outside.symbol == prefix.symbol);
        let factor = outside.map(|outside| outside.factor.to_f64());
        let expected = format!("1e{}", prefix.power).parse::<f64>().unwrap();
        assert_eq!(factor, Some(expected), "{}", prefix.symbol);
    }
}

/// Known errors of `runits` 0.1.10 for an engineer's reading: a barrel of 31.5 gallons, a mil that
/// is an angle, a `cfm` that is a hundredth of a femtometre.
#[test]
fn val_known_errors_of_runits_are_not_ours() {
    let in_si = |text: &str, target: &str| {
        runits::Quantity::parse(text)
            .ok()
            .and_then(|quantity| quantity.to(target).ok())
    };
    let barrel = in_si("1 bbl", "m^3").unwrap().value();
    let ours = Unit::parse("bbl(oil)").unwrap().to_si(1.0, None).unwrap();
    assert!((barrel / ours - 0.75).abs() < 1e-12);
    assert!(in_si("1 mil", "m").is_none() && in_si("1 mil", "radian").is_some());
    for name in ["bbl", "mil"] {
        assert!(matches!(
            Unit::parse(name).unwrap_err().fault,
            UnitFault::Ambiguous { .. }
        ));
    }
    assert!((in_si("1 cfm", "m").unwrap().value() / 1e-17 - 1.0).abs() < 1e-12);
    let ours = Unit::parse("ft^3/min").unwrap().to_si(1.0, None).unwrap();
    assert!((ours / 0.0004719474432 - 1.0).abs() < 1e-15); // NIST SP 811 (2008), B.8: 4.719 474 E−04
}

/// Density of water 999.972 kg/m³ at 4 °C and 999.001 kg/m³ at 60 °F, times 9.806 65 m/s² and an
/// inch; the densities are those of pint's definitions (0.999 972 and 0.999 001 g/cm³).
#[test]
fn hand_columns_of_real_water() {
    for (name, density) in [("inH2O(4degC)", 999.972), ("inH2O(60degF)", 999.001)] {
        let ours = Unit::parse(name).unwrap().to_si(1.0, None).unwrap();
        assert!(
            (ours / (density * 9.80665 * 0.0254) - 1.0).abs() < 1.5e-5,
            "{name}"
        );
    }
}

fn by_runits(name: &str, unit: &Unit) -> f64 {
    let dimension = unit.dimension();
    let target = if dimension.is_none() {
        "radian".to_owned()
    } else {
        dimension.si_unit_text()
    };
    let quantity = runits::Quantity::parse(&format!("1 {name}")).unwrap();
    quantity
        .to(&target)
        .unwrap_or_else(|error| panic!("{name}: {error}"))
        .value()
}

/// UCUM has the radian as a base unit, so the angle of the target is found by trial.
fn by_ucum(code: &str, unit: &Unit) -> f64 {
    let symbols = ["m", "kg", "s", "A", "K", "mol", "cd"];
    let mut target = "1".to_owned();
    for (exponent, symbol) in unit.dimension().exponents().iter().zip(symbols) {
        if *exponent.numer() != 0 {
            target = format!("{target}.{symbol}{}", exponent.numer());
        }
    }
    ["", ".rad", ".rad2"]
        .iter()
        .find_map(|angle| octofhir_ucum::convert(1.0, code, &format!("{target}{angle}")).ok())
        .unwrap_or_else(|| panic!("{code} is no {target}"))
}
