//! Every fault: where it points, what it says, how it is mended.

use super::super::*;

#[track_caller]
fn check_unit(text: &str, pointed: &str, message: &str, help: &str) {
    let error = Unit::parse(text).expect_err(text);
    assert_eq!(
        &text[error.offset..error.offset + error.length],
        pointed,
        "{text}"
    );
    assert_eq!(error.to_string(), message, "{text}");
    assert_eq!(error.help().unwrap_or_default(), help, "{text}");
}

#[track_caller]
fn check_quantity(text: &str, pointed: &str, message: &str, help: &str) {
    let error = Quantity::parse(text).expect_err(text);
    assert_eq!(
        &text[error.offset..error.offset + error.length],
        pointed,
        "{text}"
    );
    assert_eq!(error.to_string(), message, "{text}");
    assert_eq!(error.help().unwrap_or_default(), help, "{text}");
}

#[track_caller]
fn check_nearest(text: &str, expected: &[&str]) {
    match Unit::parse(text).expect_err(text).fault {
        UnitFault::Unknown { nearest, .. } => assert_eq!(nearest, expected, "{text}"),
        other => panic!("{text}: {other:?}"),
    }
}

#[test]
fn hand_faults_of_units() {
    check_unit(
        "",
        "",
        "the unit is empty",
        "a plain number has the unit \"1\"",
    );
    check_unit("kg/", "", "the unit is not complete", "a unit must follow");
    check_unit(
        "kg / m",
        " ",
        "there is a space inside the unit",
        "write units without spaces, as in kg/(m*s)",
    );
    check_unit("kg&m", "&", "'&' cannot stand here in a unit", "");
    check_unit(
        "kg·m²",
        "·",
        "the character '·' is not used in units",
        "write \"kg*m^2\"",
    );
    check_unit("W/(m^2*K", "(", "this parenthesis is not closed", "");
    check_unit("m)", ")", "this parenthesis was not opened", "");
    check_unit(
        "3*m",
        "3",
        "a number other than 1 cannot stand in a unit",
        "put the number into the value; powers that are fractions are written ^(1/2)",
    );
    check_unit(
        "m^1/2",
        "2",
        "a number other than 1 cannot stand in a unit",
        "put the number into the value; powers that are fractions are written ^(1/2)",
    );
    for (text, pointed) in [
        ("m^0", "0"),
        ("m^100", "100"),
        ("m^(1/0)", "(1/0)"),
        ("m^x", ""),
        ("m^1.5", "1"),
    ] {
        let help = "write ^2, ^-1 or ^(1/2); parts up to 99, not zero";
        check_unit(text, pointed, "this is not the exponent of a unit", help);
    }
    check_unit(
        "J/kg*K",
        "*",
        "what follows the \"/\" can be read in two ways",
        "write \"J/(kg*K)\" or \"J*K/kg\"",
    );
    check_unit(
        "W/m^2/K",
        "/",
        "a second \"/\" needs parentheses",
        "write \"W/(m^2*K)\"",
    );
    check_unit(
        "kg(m*s)",
        "(",
        "there is no \"*\" between \"kg\" and the parenthesis",
        "write \"kg*(…\"",
    );
    check_unit(
        "L/gal",
        "gal",
        "\"gal\" stands for several units",
        "write \"gal(US)\" or \"gal(UK)\"",
    );
    check_unit(
        "W/(m^2*degC)",
        "degC",
        "\"degC\" is a point on a scale and cannot be part of a composed unit",
        "write \"K\"",
    );
    check_unit(
        "kPa(g)/m",
        "kPa(g)",
        "\"kPa(g)\" is a point on a scale and cannot be part of a composed unit",
        "write \"kPa\"",
    );
    check_unit(
        "m/sek",
        "sek",
        "the unit \"sek\" is not known",
        "`countermarch units` lists the known units",
    );
    let long = "m*".repeat(200);
    check_unit(&long, &long, "the unit is longer than 200 characters", "");
    let deep = format!("{}m", "(".repeat(20));
    check_unit(&deep, "(", "parentheses are nested more than 8 deep", "");
    let huge = "(Qm^99)^99";
    check_unit(
        huge,
        huge,
        "the unit is too large or too small to compute",
        "",
    );
}

#[test]
fn hand_near_misses() {
    check_nearest("KW", &["kW"]);
    check_nearest("kpa", &["kPa"]);
    check_nearest("mpa", &["mPa", "MPa"]);
    check_nearest("m3", &["m^3"]);
    check_nearest("rpm", &["rev/min"]);
    check_nearest("cfm", &["ft^3/min"]);
    check_nearest("psig", &["psi(g)"]);
    check_nearest("gpm", &["gal(US)/min", "gal(UK)/min"]);
    check_nearest("Nm", &["N*m"]);
    check_nearest("metre", &["m"]);
    check_nearest("kilometers", &["km"]);
    check_nearest("Kelvin", &["K"]);
    check_nearest("torr", &["Torr"]);
    check_nearest("bars", &["bar"]);
    check_nearest("frobnicate", &[]);
}

#[test]
fn hand_every_choice_and_spelling_is_a_unit() {
    for name in [
        "gal", "oz", "ton", "kt", "cal", "kcal", "Btu", "hp", "mil", "inH2O", "yr", "kgal",
    ] {
        match Unit::parse(name).unwrap_err().fault {
            UnitFault::Ambiguous { choices, .. } => {
                for choice in choices {
                    assert!(Unit::parse(choice).is_ok(), "{choice}");
                }
            }
            other => panic!("{name}: {other:?}"),
        }
    }
    for (spelling, units) in super::super::suggest::SPELLINGS {
        assert!(Unit::parse(spelling).is_err(), "{spelling} is a unit");
        for unit in *units {
            assert!(Unit::parse(unit).is_ok(), "{spelling}: {unit}");
        }
    }
    for (name, choices) in super::super::catalogue::AMBIGUOUS {
        assert!(catalogue().all(|entry| entry.symbol != *name), "{name}");
        for choice in *choices {
            assert!(Unit::parse(choice).is_ok(), "{name}: {choice}");
        }
    }
}

#[test]
fn hand_faults_of_quantities() {
    check_quantity(
        "m",
        "m",
        "there is no number at the start",
        "a quantity is a number, one space and a unit, such as \"12.5 m^2\"",
    );
    check_quantity(
        "−5 m",
        "−",
        "this minus sign is not ASCII",
        "write the hyphen \"-\" of the keyboard",
    );
    check_quantity(
        "1,5 m",
        ",",
        "there is a comma inside the number",
        "write a decimal point",
    );
    for text in [".5 m", "5. m"] {
        let number = text.split(' ').next().unwrap();
        let help = "write a digit on both sides of the point, as in 0.5";
        check_quantity(
            text,
            number,
            "a digit is missing beside the decimal point",
            help,
        );
    }
    check_quantity(
        "25°C",
        "°C",
        "there is no space after the number",
        "write one space before \"degC\"",
    );
    check_quantity(
        "5mm",
        "mm",
        "there is no space after the number",
        "write one space before \"mm\"",
    );
    check_quantity(
        "5  mm",
        "  mm",
        "there are spaces too many",
        "write the number, one space and the unit, and nothing else",
    );
    check_quantity(
        "1e400 m",
        "1e400",
        "the value is beyond the range of numbers",
        "",
    );
    check_quantity(
        "1e-400 m",
        "1e-400",
        "the value is beyond the range of numbers",
        "",
    );
    check_quantity(
        "1e308 km",
        "1e308 km",
        "the value is beyond the range of numbers",
        "",
    );
    check_quantity(
        "-300 degC",
        "-300 degC",
        "the temperature is below absolute zero",
        "",
    );
    check_quantity(
        "12.5 gal/h",
        "gal",
        "\"gal\" stands for several units",
        "write \"gal(US)\" or \"gal(UK)\"",
    );
    check_quantity(
        "1 234.5 m",
        "234.5",
        "a number other than 1 cannot stand in a unit",
        "put the number into the value; powers that are fractions are written ^(1/2)",
    );
    let long = format!("1 {}", "m".repeat(500));
    check_quantity(&long, &long, "the text is too long for a quantity", "");
}
