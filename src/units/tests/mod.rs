mod crosscheck;
mod faults;
mod properties;

use super::*;

fn unit(text: &str) -> Unit {
    Unit::parse(text).unwrap_or_else(|error| panic!("{text}: {error}"))
}

fn si(text: &str) -> f64 {
    let quantity = Quantity::parse(text).unwrap_or_else(|error| panic!("{text}: {error}"));
    quantity.value_si(Some(101_325.0)).unwrap()
}

/// Worked from the definitions: yd = 0.9144 m, lb = 0.453 592 37 kg, g = 9.806 65 m/s², gal(US) =
/// 231 in³, Btu(IT)/(lb·degF) = cal(IT)/(g·K).
#[test]
fn hand_exact_conversions() {
    for (text, value) in [
        ("12 min", 720.0),
        ("5 mm", 0.005),
        ("0.1 mm", 0.0001),
        ("3 um", 3e-6),
        ("36 km/h", 10.0),
        ("1 psi", 44482216152605.0 / 6451600000.0),
        ("1 lbf/in^2", 44482216152605.0 / 6451600000.0),
        ("1 gal(US)", 0.003785411784),
        ("231 in^3", 0.003785411784),
        ("1 ft^3", 0.028316846592),
        ("1 acre", 4046.8564224),
        ("1 hp(mech)", 745.6998715822702),
        ("550 ft*lbf/s", 745.6998715822702),
        ("1 hp(metric)", 735.49875),
        ("1 Btu(IT)", 1055.05585262),
        ("1 eV", 1.602176634e-19),
        ("1 kg/m^3", 1.0),
        ("1 1/s", 1.0),
        ("1 %", 0.01),
        ("1 rev", 2.0 * std::f64::consts::PI),
        ("180 deg", std::f64::consts::PI),
        ("0 degC", 273.15),
        ("-40 degC", 233.14999999999998),
        ("32 degF", 273.15),
        ("0 bar(g)", 101_325.0),
        ("-50 kPa(g)", 51_325.0),
        ("2 MPa*m^(1/2)", 2e6),
        ("7", 7.0),
        ("-0.5e-3", -0.0005),
    ] {
        assert_eq!(si(text), value, "{text}");
    }
    assert_eq!(si("1 Btu(IT)/(lb*degR)"), si("1 cal(IT)/(g*K)"));
}

#[test]
fn hand_every_row_reads() {
    for entry in catalogue() {
        let read = unit(entry.symbol);
        assert_eq!(read.dimension(), entry.dimension(), "{}", entry.symbol);
        assert!(read.numerator() > 0.0 && read.denominator() > 0.0);
        assert_eq!(read.print(), entry.print);
        assert!(!entry.source.is_empty());
    }
}

#[test]
fn hand_gauge_needs_ambient_pressure() {
    let gauge = unit("bar(g)");
    assert_eq!(gauge.to_si(1.0, None), Err(MissingAmbient));
    assert_eq!(gauge.from_si(1.0, None), Err(MissingAmbient));
    assert_eq!(gauge.to_si(1.0, Some(1e5)), Ok(2e5));
    assert_eq!(gauge.from_si(2e5, Some(1e5)), Ok(1.0));
    assert_eq!(gauge.kind(), Kind::Gauge);
}

#[test]
fn hand_units_of_differences() {
    for (written, difference) in [
        ("degC", "K"),
        ("degF", "K"),
        ("bar(g)", "bar"),
        ("mbar(g)", "mbar"),
        ("psi(g)", "psi"),
        ("m/s", "m/s"),
    ] {
        assert_eq!(unit(written).difference_unit().text(), difference);
    }
    assert_eq!(unit("degF").difference_to_si(9.0), 5.0);
}

#[test]
fn hand_print() {
    for (written, printed) in [
        ("m^3/h", "m³/h"),
        ("kW/(m^2*K)", "kW/(m²·K)"),
        ("degC", "°C"),
        ("bar(g)", "bar(g)"),
        ("min", "min"),
        ("um", "µm"),
        ("Mohm", "MΩ"),
        ("s^-1", "s⁻¹"),
        ("MPa*m^(1/2)", "MPa·√m"),
        ("m^(2/3)", "m^(2/3)"),
        ("(m/s)^2", "(m/s)²"),
        ("(m/s)*kg", "(m/s)·kg"),
        ("(m/s)/kg", "(m/s)/kg"),
        ("1/s", "1/s"),
        ("inH2O(4degC)", "inH₂O(4 °C)"),
        ("1", "1"),
    ] {
        assert_eq!(unit(written).print(), printed);
        assert_eq!(unit(written).text(), written);
    }
    assert_eq!(unit("degC").after("25"), "25\u{A0}°C");
    assert_eq!(unit("deg").after("25"), "25°");
    assert_eq!(unit("%").after("5"), "5\u{A0}%");
    assert_eq!(Unit::one().after("5"), "5");
}

#[test]
fn hand_dimensions() {
    let heat_transfer = unit("W/(m^2*K)").dimension();
    assert_eq!(heat_transfer.to_string(), "M·T⁻³·Θ⁻¹");
    assert_eq!(heat_transfer.si_unit(), "kg/(s³·K)");
    assert_eq!(
        heat_transfer.usual_name(),
        Some("heat transfer coefficient")
    );
    assert_eq!(unit("m/s").dimension().to_string(), "L·T⁻¹");
    assert_eq!(unit("m/s").dimension().si_unit(), "m/s");
    assert_eq!(
        unit("MPa*m^(1/2)").dimension().to_string(),
        "L^(-1/2)·M·T⁻²"
    );
    assert_eq!(unit("s^-1").dimension().si_unit(), "1/s");
    assert_eq!(Dimension::NONE.to_string(), "1");
    assert_eq!(unit("deg").dimension(), Dimension::NONE);
    let toughness = unit("MPa*m^(1/2)").dimension();
    assert_eq!(Unit::coherent(toughness).print(), toughness.si_unit());
    assert_eq!(
        unit(Unit::coherent(toughness).text()).dimension(),
        toughness
    );
}

#[test]
fn hand_quantity_keeps_what_was_written() {
    let quantity = Quantity::parse("0.80 kW/(m^2*K)").unwrap();
    assert_eq!(quantity.to_string(), "0.8 kW/(m^2*K)");
    assert_eq!(quantity.value_si(None), Ok(800.0));
    assert_eq!(Quantity::parse("0.61").unwrap().to_string(), "0.61");
}

#[test]
fn hand_quantity_or_formula() {
    for text in [
        "12.5 m^2",
        "5 %",
        "0 bar(g)",
        "7",
        "-3e-4 m",
        "25°C",
        "5m",
        "2 1/s",
        "1,5 m",
        "1 234.5 m",
    ] {
        assert!(Quantity::is_meant(text), "{text}");
    }
    for text in [
        "h_0",
        "2 * h_0",
        "2*h_0",
        "-h_0",
        "(1 + 2) * h",
        "1 - x",
        "1/2",
        "",
        ".",
        "e3",
    ] {
        assert!(!Quantity::is_meant(text), "{text}");
    }
}
