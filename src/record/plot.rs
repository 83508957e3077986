//! Axes for plots: which range, which ticks, how they are labelled.

use super::block::{Axis, Label, Run, Scale, Shift, Tick};
use super::words::{self, label, plain_run, power_of_ten};
use crate::float::{self, Numeral};

/// A linear axis that holds `values`, with round ticks.
pub fn linear_axis(title: Label, values: impl IntoIterator<Item = f64>, must_hold: &[f64]) -> Axis {
    let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
    for value in values
        .into_iter()
        .chain(must_hold.iter().copied())
        .filter(|value| value.is_finite())
    {
        low = float::min(low, value);
        high = float::max(high, value);
    }
    if low > high {
        (low, high) = (0.0, 1.0);
    }
    if high - low <= 1e-12 * float::max(high.abs(), low.abs()) {
        let half = if high == 0.0 { 1.0 } else { 0.1 * high.abs() };
        (low, high) = (low - half, high + half);
    }
    // Near zero the axis begins at zero: a depth that falls to nothing is read off the base line.
    if low > 0.0 && low < 0.4 * high {
        low = 0.0;
    } else if high < 0.0 && high > 0.4 * low {
        high = 0.0;
    }
    let step = round_step(high - low, 6.0);
    let (first, last) = ((low / step + 1e-9).floor(), (high / step - 1e-9).ceil());
    linear_ticks(title, first, last, step)
}

/// A linear axis over exactly `low` to `high`, as the abscissa has.
pub fn exact_axis(title: Label, low: f64, high: f64) -> Axis {
    let (low, high) = if low < high { (low, high) } else { (high, low) };
    let step = round_step(high - low, 8.0);
    let (first, last) = ((low / step - 1e-9).ceil(), (high / step + 1e-9).floor());
    Axis {
        low,
        high,
        ..linear_ticks(title, first, last, step)
    }
}

fn linear_ticks(title: Label, first: f64, last: f64, step: f64) -> Axis {
    let decimals = (-words::magnitude(step)).max(0);
    let count = (last - first).round() as i64;
    let at = |k: i64| {
        // Multiples of a decimal step, so that 0.3 is 0.3 and not 0.30000000000000004.
        let value = (first + k as f64) * step;
        Numeral::decimals(value, decimals)
            .plain()
            .parse::<f64>()
            .unwrap_or(value)
    };
    let ticks: Vec<Tick> = (0..=count)
        .map(|k| Tick {
            at: at(k),
            label: label(&Numeral::decimals(at(k), decimals).typographic()),
        })
        .collect();
    let minor = (0..count).map(|k| 0.5 * (at(k) + at(k + 1))).collect();
    Axis {
        title,
        scale: Scale::Linear,
        low: at(0),
        high: at(count),
        ticks,
        minor,
    }
}

/// 1, 2 or 5 times a power of ten, so that about `wanted` steps cover `span`.
fn round_step(span: f64, wanted: f64) -> f64 {
    let rough = span / wanted;
    let power = power_of_ten(words::magnitude(rough));
    let digit = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .find(|digit| digit * power >= rough * 0.999)
        .unwrap_or(10.0);
    digit * power
}

/// A logarithmic axis over whole decades that hold `values`.
pub fn logarithmic_axis(title: Label, values: impl IntoIterator<Item = f64>) -> Axis {
    let (mut low, mut high) = (i32::MAX, i32::MIN);
    for value in values
        .into_iter()
        .filter(|value| value.is_finite() && *value > 0.0)
    {
        let exponent = words::magnitude(value);
        low = low.min(exponent);
        high = high.max(if value > power_of_ten(exponent) {
            exponent + 1
        } else {
            exponent
        });
    }
    if low > high {
        (low, high) = (0, 1);
    }
    if low == high {
        high += 1;
    }
    // At most ten labels.
    let every = (high - low + 9) / 10;
    let ticks = (low..=high)
        .filter(|exponent| (exponent - low) % every == 0)
        .map(|exponent| Tick {
            at: power_of_ten(exponent),
            label: decade_label(exponent),
        })
        .collect();
    let minor = if high - low <= 4 {
        (low..high)
            .flat_map(|exponent| {
                (2..10).map(move |digit| f64::from(digit) * power_of_ten(exponent))
            })
            .collect()
    } else {
        Vec::new()
    };
    Axis {
        title,
        scale: Scale::Logarithmic,
        low: power_of_ten(low),
        high: power_of_ten(high),
        ticks,
        minor,
    }
}

fn decade_label(exponent: i32) -> Label {
    let digits = exponent.to_string().replace('-', "−");
    Label(vec![
        plain_run("10"),
        Run {
            text: digits,
            italic: false,
            shift: Shift::Superscript,
        },
    ])
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(axis: &Axis) -> Vec<String> {
        axis.ticks
            .iter()
            .map(|tick| tick.label.0.iter().map(|run| run.text.as_str()).collect())
            .collect()
    }

    #[test]
    fn hand_round_ticks() {
        let axis = linear_axis(Label::default(), [0.13, 3.9], &[]);
        assert_eq!((axis.low, axis.high), (0.0, 4.0));
        assert_eq!(labels(&axis), ["0", "1", "2", "3", "4"]);
        let axis = linear_axis(Label::default(), [0.0, 0.6], &[]);
        assert_eq!(
            labels(&axis),
            ["0.0", "0.1", "0.2", "0.3", "0.4", "0.5", "0.6"]
        );
        let axis = exact_axis(Label::default(), 0.0, 1800.0);
        assert_eq!(labels(&axis), ["0", "500", "1000", "1500"]);
    }

    #[test]
    fn hand_decades() {
        let axis = logarithmic_axis(Label::default(), [3e-4, 0.02]);
        assert_eq!((axis.low, axis.high), (1e-4, 0.1));
        assert_eq!(labels(&axis), ["10−4", "10−3", "10−2", "10−1"]);
    }

    #[test]
    fn hand_degenerate_values_still_give_an_axis() {
        assert!(linear_axis(Label::default(), [f64::NAN], &[]).ticks.len() >= 2);
        assert!(linear_axis(Label::default(), [5.0, 5.0], &[]).ticks.len() >= 2);
        assert!(logarithmic_axis(Label::default(), [0.0]).ticks.len() >= 2);
    }
}
