use super::*;

#[test]
fn hand_functions_at_known_points() {
    assert_eq!(sin(0.0), 0.0);
    assert_eq!(cos(0.0), 1.0);
    assert_eq!(exp(0.0), 1.0);
    assert_eq!(ln(1.0), 0.0);
    assert_eq!(log10(1000.0), 3.0);
    assert_eq!(cbrt(-27.0), -3.0);
    assert_eq!(hypot(3.0, 4.0), 5.0);
    assert_eq!(atan2(0.0, -1.0), std::f64::consts::PI);
    assert_eq!(atan(1.0), std::f64::consts::FRAC_PI_4);
    assert_eq!(asin(1.0), std::f64::consts::FRAC_PI_2);
    assert_eq!(acos(-1.0), std::f64::consts::PI);
    assert_eq!(
        (tan(0.0), sinh(0.0), cosh(0.0), tanh(0.0)),
        (0.0, 0.0, 1.0, 0.0)
    );
}

/// Abramowitz and Stegun, Handbook of Mathematical Functions (1964), table 1.1: square root of ten,
/// e, its root and the natural logarithms of 2 and 10, to more digits than a float has.
#[test]
fn val_constants_of_the_handbook() {
    let printed = |text: &str| text.parse::<f64>().unwrap();
    assert_eq!(exp(1.0), printed("2.71828182845904523536"));
    assert_eq!(exp(0.5), printed("1.64872127070012814685"));
    assert_eq!(ln(2.0), printed("0.69314718055994530942"));
    assert_eq!(ln(10.0), printed("2.30258509299404568402"));
    assert_eq!(pow(10.0, 0.5), printed("3.16227766016837933200"));
    assert_eq!(pow(2.0, 1.0 / 3.0), cbrt(2.0));
}

/// The On-Line Encyclopedia of Integer Sequences: A049469 sin 1, A049470 cos 1, A049471 tan 1,
/// A073742 sinh 1, A073743 cosh 1, A073744 tanh 1, A073000 arctan(1/2), A002580 cube root of 2,
/// A019673 π/6, A002193 √2.
#[test]
fn val_decimal_expansions() {
    let printed = |text: &str| text.parse::<f64>().unwrap();
    assert_eq!(sin(1.0), printed("0.84147098480789650665250"));
    assert_eq!(cos(1.0), printed("0.54030230586813971740093"));
    assert_eq!(tan(1.0), printed("1.55740772465490223050697"));
    assert_eq!(sinh(1.0), printed("1.17520119364380145688238"));
    assert_eq!(cosh(1.0), printed("1.54308063481524377847790"));
    assert_eq!(tanh(1.0), printed("0.76159415595576488811945"));
    assert_eq!(atan(0.5), printed("0.46364760900080611621425"));
    assert_eq!(atan2(1.0, 2.0), printed("0.46364760900080611621425"));
    assert_eq!(cbrt(2.0), printed("1.25992104989487316476721"));
    assert_eq!(asin(0.5), printed("0.52359877559829887307710"));
    assert_eq!(acos(0.5), 2.0 * asin(0.5));
    assert_eq!(hypot(1.0, 1.0), printed("1.41421356237309504880168"));
}

#[test]
fn hand_corners_of_atan2_and_hypot() {
    use std::f64::consts::{FRAC_PI_2, PI};
    assert_eq!(atan2(-0.0, -1.0), -PI);
    assert_eq!(atan2(5e-324, 1e-300), 5e-324 / 1e-300);
    assert_eq!(atan2(1.0, 0.0), FRAC_PI_2);
    assert_eq!(atan2(f64::INFINITY, 1.0), FRAC_PI_2);
    assert_eq!(hypot(1e300, 1e300), 1e300 * 2f64.sqrt());
    assert_eq!(hypot(3e-320, 4e-320), 5e-320);
    assert!(atan2(f64::NAN, 1.0).is_nan() && hypot(f64::NAN, 1.0).is_nan());
}

#[test]
fn prop_products_are_near_the_power() {
    for value in samples() {
        for exponent in -16..=16_i32 {
            let exact = pxfm::f_pow(value, f64::from(exponent));
            if exact.is_normal() && powi(value, exponent.abs()).is_normal() {
                let allowed = if exponent < 0 { 17.0 } else { 16.0 };
                let relative = (powi(value, exponent) / exact - 1.0).abs();
                assert!(
                    relative <= allowed * f64::EPSILON / 2.0,
                    "{value} ^ {exponent}"
                );
            }
        }
    }
}

#[test]
fn hand_powers_are_products() {
    for x in [1.1, -0.7, 3.0e5, 2.2e-3] {
        assert_eq!(powi(x, 0), 1.0);
        assert_eq!(powi(x, 1), x);
        assert_eq!(powi(x, 2), x * x);
        assert_eq!(powi(x, 3), x * (x * x));
        assert_eq!(powi(x, -2), 1.0 / (x * x));
        assert_eq!(pow(x, 3.0), powi(x, 3));
        assert_eq!(pow(x, -1.0), 1.0 / x);
    }
    assert_eq!(pow(7.0, 0.5), 7f64.sqrt());
    assert_eq!(powi(1.5, 40), pow(1.5, 40.0));
    assert_eq!(powi(2.0, i32::MIN), 0.0);
    assert!(pow(-8.0, 1.0 / 3.0).is_nan());
}

#[test]
fn hand_not_a_number_propagates() {
    for (a, b) in [(f64::NAN, 1.0), (1.0, f64::NAN), (f64::NAN, f64::NAN)] {
        assert!(min(a, b).is_nan() && max(a, b).is_nan());
    }
    assert!(sign(f64::NAN).is_nan());
    assert_eq!((min(2.0, -1.0), max(2.0, -1.0)), (-1.0, 2.0));
    assert_eq!((sign(-3.0), sign(4.0)), (-1.0, 1.0));
    assert!(sign(-0.0).is_sign_positive());
}

#[test]
fn hand_sum_keeps_what_plain_addition_loses() {
    assert_eq!(sum(&[1.0, 1e100, 1.0, -1e100]), 2.0);
    assert_eq!(sum(&[0.1; 10]), 1.0);
    assert_eq!(sum(&[]), 0.0);
    assert_eq!(sum(&[f64::MAX, f64::MAX]), f64::INFINITY);
    assert!(sum(&[f64::INFINITY, f64::NEG_INFINITY]).is_nan());
    assert_eq!(mean(&[1.0, 2.0, 6.0]), 3.0);
    assert!(mean(&[]).is_nan());
}

#[test]
fn hand_shortest() {
    for (value, text) in [
        (0.1, "0.1"),
        (-0.0, "0"),
        (12.0, "12"),
        (1e16, "1e16"),
        (-2.5e-9, "-2.5e-9"),
        (123456789.125, "123456789.125"),
        (1e-5, "0.00001"),
    ] {
        assert_eq!(shortest(value), text);
    }
}

#[test]
fn prop_shortest_reads_back() {
    for value in samples() {
        assert_eq!(shortest(value).parse::<f64>().unwrap(), value);
        assert_eq!(
            Numeral::shortest(value).plain().parse::<f64>().unwrap(),
            value
        );
    }
}

#[test]
fn hand_rounding_to_significant_digits() {
    for (value, digits, text) in [
        (2.675, 3, "2.68"),
        (2.665, 3, "2.66"),
        (0.15, 1, "0.2"),
        (0.25, 1, "0.2"),
        (9.996, 3, "10.0"),
        (99.96, 3, "100"),
        (999999.6, 6, "1.00000e6"),
        (999999.4, 6, "999999"),
        (123456.0, 3, "123000"),
        (0.0001, 3, "0.000100"),
        (0.00009999, 2, "0.00010"),
        (0.0000123, 2, "1.2e-5"),
        (-1.0, 3, "-1.00"),
        (0.0, 3, "0.00"),
        (5e-324, 2, "5.0e-324"),
    ] {
        assert_eq!(
            Numeral::significant(value, digits).plain(),
            text,
            "{value} to {digits}"
        );
    }
}

#[test]
fn hand_rounding_to_decimal_places() {
    for (value, places, text) in [
        (2.5, 0, "2"),
        (3.5, 0, "4"),
        (0.5, 0, "0"),
        (0.51, 0, "1"),
        (0.06, 1, "0.1"),
        (0.05, 1, "0.0"),
        (0.04, 0, "0"),
        (-0.004, 2, "0.00"),
        (99.995, 2, "100.00"),
        (1234.0, -2, "1200"),
        (950.0, -3, "1000"),
        (49.0, -2, "0"),
        (50.0, -2, "0"),
        (51.0, -2, "100"),
        (1.0, 3, "1.000"),
        (0.0, 2, "0.00"),
    ] {
        assert_eq!(
            Numeral::decimals(value, places).plain(),
            text,
            "{value} to {places} places"
        );
    }
}

#[test]
fn hand_bounds_round_up() {
    for (value, text) in [
        (1.01e-9, "2e-9"),
        (0.3, "0.3"),
        (0.96, "1"),
        (9.1e-7, "1e-6"),
        (0.0, "0"),
    ] {
        assert_eq!(Numeral::rounded_up(value, 1).plain(), text);
    }
}

#[test]
fn prop_rounded_numbers_are_near() {
    for value in samples() {
        for digits in 1..=17 {
            let read: f64 = Numeral::significant(value, digits).plain().parse().unwrap();
            let unit = pow(
                10.0,
                log10(value.abs().max(1e-300)).floor() - digits as f64 + 1.0,
            );
            assert!(
                (read - value).abs() <= 0.500001 * unit + value.abs() * 1e-15,
                "{value} {digits}"
            );
            let bound: f64 = Numeral::rounded_up(value, digits).plain().parse().unwrap();
            assert!(bound.abs() >= value.abs());
        }
    }
}

#[test]
fn hand_typographic() {
    let grouped = Numeral::shortest(-123456.78901);
    assert_eq!(grouped.typographic(), "−123\u{202F}456.789\u{202F}01");
    assert_eq!(Numeral::shortest(1234.5678).typographic(), "1234.5678");
    assert_eq!(Numeral::shortest(12345.0).typographic(), "12\u{202F}345");
    assert_eq!(
        Numeral::significant(1.234e-7, 2).typographic(),
        "1.2\u{202F}×\u{202F}10⁻⁷"
    );
    assert_eq!(Numeral::shortest(f64::NEG_INFINITY).typographic(), "−inf");
    assert_eq!(Numeral::shortest(f64::NAN).plain(), "NaN");
}

/// GUM (JCGM 100:2008) 7.2.6: 10.47 mΩ is rounded up to 11 mΩ, 28.05 kHz down to 28 kHz, and
/// 10.057 62 Ω with 27 mΩ is 10.058 Ω. 7.2.2: 100.021 47 g with 0.35 mg.
#[test]
fn val_gum_rounding_of_uncertainties() {
    let (_, u) = value_with_uncertainty(100.0, 10.47);
    assert_eq!(u.plain(), "11");
    let (_, u) = value_with_uncertainty(1000.0, 28.05);
    assert_eq!(u.plain(), "28");
    let (y, u) = value_with_uncertainty(10.05762, 0.027);
    assert_eq!(
        (y.plain(), u.plain()),
        ("10.058".to_owned(), "0.027".to_owned())
    );
    let (y, u) = value_with_uncertainty(100.02147, 0.00035);
    assert_eq!(
        (y.plain(), u.plain()),
        ("100.02147".to_owned(), "0.00035".to_owned())
    );
}

#[test]
fn hand_value_with_uncertainty() {
    for (value, uncertainty, expected) in [
        (13.0249, 0.004005, ("13.0249", "0.0040")),
        (13.0249, 0.00402, ("13.0249", "0.0041")),
        (1.23456e-7, 1.21e-9, ("1.235e-7", "0.013e-7")),
        (123456.0, 1151.0, ("123500", "1200")),
        (0.0, 0.995, ("0.0", "1.0")),
        (-0.01, 2.0, ("0.0", "2.0")),
        (5.0, 0.0, ("5", "0")),
        (2.0e9, 3.0e7, ("2.000e9", "0.030e9")),
        (1.0, 1e-30, ("1.0000000000000000", "0.0000000000000001")),
    ] {
        let (y, u) = value_with_uncertainty(value, uncertainty);
        assert_eq!((y.plain().as_str(), u.plain().as_str()), expected);
    }
}

#[test]
fn hand_plus_minus() {
    for (value, uncertainty, text) in [
        (13.0249, 0.0038, "13.0249 ± 0.0038"),
        (-123456.0, 1151.0, "−123 500 ± 1200"),
        (1.23456e-7, 1.21e-9, "(1.235 ± 0.013) × 10⁻⁷"),
        (1e9, 0.0, "1 × 10⁹ ± 0"),
    ] {
        let (value, margin) = value_with_uncertainty(value, uncertainty);
        assert_eq!(value.plus_minus(&margin).replace('\u{202F}', " "), text);
    }
}

#[test]
fn prop_uncertainty_is_never_understated_by_more_than_a_hundredth() {
    for value in samples() {
        for uncertainty in samples().map(f64::abs) {
            let (y, u) = value_with_uncertainty(value, uncertainty);
            if uncertainty > 0.0 {
                let printed: f64 = u.plain().parse().unwrap();
                assert!(
                    printed >= uncertainty * 0.99,
                    "{uncertainty} as {}",
                    u.plain()
                );
                assert_eq!(y.exponent, u.exponent);
            }
            assert!(y.digits.len() < 700);
        }
    }
}

/// Numbers of every size, from a small fixed congruence.
fn samples() -> impl Iterator<Item = f64> {
    let mut state = 1_u64;
    (0..200).map(move |index| {
        state = state
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        let mantissa = (state >> 11) as f64 / (1_u64 << 53) as f64 - 0.5;
        mantissa * pow(10.0, f64::from(index % 61 - 30))
    })
}
