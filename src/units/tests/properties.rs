//! Properties over the whole catalogue and over arbitrary texts.

use std::collections::BTreeMap;

use num_rational::Ratio;

use super::super::*;
use super::unit;

/// A small fixed congruence: the same texts in every run.
struct Draws(u64);

impl Draws {
    fn below(&mut self, limit: usize) -> usize {
        self.0 = self
            .0
            .wrapping_mul(6364136223846793005)
            .wrapping_add(1442695040888963407);
        ((self.0 >> 33) as usize) % limit
    }

    fn pick<'a, T>(&mut self, items: &'a [T]) -> &'a T {
        &items[self.below(items.len())]
    }

    fn value(&mut self) -> f64 {
        let size = self.below(13) as i32 - 6;
        (self.below(2_000_001) as f64 - 1_000_000.0) * crate::float::powi(10.0, size - 6)
    }
}

fn plain_symbols() -> Vec<&'static str> {
    catalogue()
        .filter(|entry| entry.scale == Scale::Plain)
        .map(|entry| entry.symbol)
        .collect()
}

#[test]
fn prop_round_trip() {
    let mut draws = Draws(1);
    for entry in catalogue() {
        let unit = unit(entry.symbol);
        let ambient = Some(101_325.0);
        let offset = match unit.kind() {
            Kind::Plain => 0.0,
            Kind::AbsoluteTemperature { offset } => offset,
            Kind::Gauge => unit.difference_from_si(101_325.0),
        };
        for _ in 0..50 {
            let value = draws.value();
            let back = unit
                .from_si(unit.to_si(value, ambient).unwrap(), ambient)
                .unwrap();
            let allowed = 4.0 * f64::EPSILON * (value.abs() + offset);
            assert!(
                (back - value).abs() <= allowed,
                "{value} {} came back as {back}",
                unit
            );
        }
    }
}

#[test]
fn prop_products_quotients_and_powers() {
    let mut draws = Draws(2);
    let symbols = plain_symbols();
    for _ in 0..2000 {
        let (a, b) = (*draws.pick(&symbols), *draws.pick(&symbols));
        let (p, q) = (draws.below(4) as i32 + 1, draws.below(3) as i32 + 1);
        let (unit_a, unit_b) = (unit(a), unit(b));
        let size = |unit: &Unit| unit.to_si(1.0, None).unwrap();
        let near = |x: f64, y: f64, what: &str| {
            assert!((x / y - 1.0).abs() < 1e-14, "{what}: {x} and {y}");
        };

        let product = unit(&format!("{a}*{b}"));
        assert_eq!(
            Some(product.dimension()),
            unit_a.dimension().times(unit_b.dimension())
        );
        near(
            size(&product),
            size(&unit_a) * size(&unit_b),
            product.text(),
        );

        let quotient = unit(&format!("{a}/{b}"));
        assert_eq!(
            Some(quotient.dimension()),
            unit_a.dimension().over(unit_b.dimension())
        );
        near(
            size(&quotient),
            size(&unit_a) / size(&unit_b),
            quotient.text(),
        );

        let power = unit(&format!("{a}^({p}/{q})"));
        let ratio = Ratio::new(p, q);
        assert_eq!(Some(power.dimension()), unit_a.dimension().to_the(ratio));
        let expected = crate::float::pow(size(&unit_a), f64::from(p) / f64::from(q));
        near(size(&power), expected, power.text());

        let undone = unit(&format!("({a}*{b})/{b}"));
        assert_eq!(undone.dimension(), unit_a.dimension());
        near(size(&undone), size(&unit_a), undone.text());
    }
}

/// Each symbol, with or without prefix, means one unit. The two exceptions are the technical
/// atmosphere and the foot, which win over the attotonne and the femtotonne.
#[test]
fn prop_symbols_are_unambiguous() {
    let mut meanings: BTreeMap<String, Vec<String>> = BTreeMap::new();
    for entry in catalogue() {
        meanings
            .entry(entry.symbol.to_owned())
            .or_default()
            .push(entry.name.to_owned());
        for prefix in prefixes().filter(|_| entry.accepts_prefixes) {
            let symbol = format!("{}{}", prefix.symbol, entry.symbol);
            meanings
                .entry(symbol)
                .or_default()
                .push(format!("{}{}", prefix.name, entry.name));
        }
    }
    let shared: Vec<&str> = meanings
        .iter()
        .filter(|(_, meanings)| meanings.len() > 1)
        .map(|(symbol, _)| symbol.as_str())
        .collect();
    assert_eq!(shared, ["at", "ft"]);
}

#[test]
fn prop_dimensions_never_overflow() {
    let mut dimension = unit("m^(99/98)").dimension();
    let mut steps = 0;
    while let Some(next) = dimension.to_the(Ratio::new(97, 95)) {
        dimension = next;
        steps += 1;
    }
    assert!(steps < 10);
    assert_eq!(dimension.to_the(Ratio::new_raw(i32::MIN, 1)), None);
    let mut dimension = unit("m^99").dimension();
    while let Some(next) = dimension.times(dimension) {
        dimension = next;
    }
    assert!(dimension.over(unit("s").dimension()).is_some());
}

/// Arbitrary characters and scrambled units: an answer or an error whose span lies in the text.
#[test]
fn prop_any_text_is_answered() {
    let mut draws = Draws(3);
    let pieces = [
        "m", "kg", "s", "degC", "bar(g)", "gal", "(", ")", "*", "/", "^", "^2", "^(1/2)", "^-",
        "-", " ", "1", "99", ".", "e5", "%", "°", "µ", "²", "\u{202E}", "\0", "Q", "q", "inH2O(",
        "((((((((", "é",
    ];
    for _ in 0..60_000 {
        let mut text = String::new();
        for _ in 0..draws.below(9) {
            if draws.below(8) == 0 {
                text.extend(char::from_u32(draws.below(0x3000) as u32));
            } else {
                text.push_str(pieces[draws.below(pieces.len())]);
            }
        }
        if let Err(error) = Unit::parse(&text) {
            assert!(text.is_char_boundary(error.offset), "{text:?}");
            assert!(
                text.is_char_boundary(error.offset + error.length),
                "{text:?}"
            );
            let _ = (error.to_string(), error.help());
        }
        let meant = Quantity::is_meant(&text);
        match Quantity::parse(&text) {
            Ok(quantity) => {
                assert!(meant, "{text:?}");
                let again = Quantity::parse(&quantity.to_string()).unwrap();
                assert_eq!(again, quantity, "{text:?}");
            }
            Err(error) => {
                assert!(text.is_char_boundary(error.offset), "{text:?}");
                assert!(
                    text.is_char_boundary(error.offset + error.length),
                    "{text:?}"
                );
            }
        }
    }
}

/// Long hostile texts take bounded time: they are refused by length, depth or first fault.
#[test]
fn prop_long_texts_are_refused_at_once() {
    for piece in ["(", "m*", "m^99", "gal", "x", "²", "1/", "QQ", "1"] {
        let text = piece.repeat(100_000);
        assert!(Unit::parse(&text).is_err());
        assert!(Quantity::parse(&text).is_err());
    }
    let deepest = format!("{}m{}", "(".repeat(8), ")".repeat(8));
    assert!(Unit::parse(&deepest).is_ok());
    let most_powers = "Qm^99*".repeat(33) + "m";
    assert!(Unit::parse(&most_powers).is_err());
}
