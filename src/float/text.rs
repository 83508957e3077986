//! Numbers as text: shortest decimals for files, rounded numerals for the page.
//!
//! Rounding works on the shortest decimal that reads back to the number, never on logarithms: a
//! value written 2.675 rounds as 2.675 does on paper, and a reader can repeat the rounding from the
//! numbers in the result files.

/// The shortest decimal that reads back to `value`, for JSON and CSV.
///
/// Both zeros give `0`; below 1e-5 and from 1e16 on an exponent is used; `NaN`, `inf`, `-inf` as
/// such (JSON has no word for them: the caller writes null).
pub fn shortest(value: f64) -> String {
    let magnitude = value.abs();
    if magnitude == 0.0 {
        "0".to_owned()
    } else if value.is_finite() && !(1e-5..1e16).contains(&magnitude) {
        format!("{value:e}")
    } else {
        format!("{value}")
    }
}

/// A rounded number, spelled but not yet typeset.
///
/// Fixed notation for magnitudes from 1e-4 to below 1e6 and for zero, otherwise a mantissa in
/// [1, 10) and a power of ten. A number that is not finite has the digits `NaN` or `inf`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Numeral {
    pub negative: bool,
    /// ASCII digits with a decimal point where there is a fraction; no grouping, no sign.
    pub digits: String,
    /// Power of ten that multiplies the digits, in scientific notation.
    pub exponent: Option<i32>,
}

impl Numeral {
    /// All digits that `value` needs to read back.
    pub fn shortest(value: f64) -> Numeral {
        Numeral::spell(value, |decimal| decimal)
    }

    /// `value` to a number of significant digits (at least one, at most 17), ties to even.
    pub fn significant(value: f64, digits: usize) -> Numeral {
        Numeral::spell(value, |decimal| {
            decimal.significant(digits, Rounding::HalfEven)
        })
    }

    /// `value` to a number of decimal places (negative: to tens, hundreds …), ties to even.
    pub fn decimals(value: f64, places: i32) -> Numeral {
        Numeral::spell(value, |decimal| {
            decimal.at_place(-clamp_place(places), Rounding::HalfEven)
        })
    }

    /// The smallest magnitude of that many significant digits that is not below `value`'s: for bounds.
    pub fn rounded_up(value: f64, digits: usize) -> Numeral {
        Numeral::spell(value, |decimal| decimal.significant(digits, Rounding::Up))
    }

    /// ASCII text that reads back as a number: `-1234.50`, `1.2e-7`.
    pub fn plain(&self) -> String {
        let sign = if self.negative { "-" } else { "" };
        match self.exponent {
            Some(exponent) => format!("{sign}{}e{exponent}", self.digits),
            None => format!("{sign}{}", self.digits),
        }
    }

    /// Text for the page: true minus sign, groups of three from five digits on, `1.2 × 10⁻⁷`.
    ///
    /// Spaces are narrow and unbreakable (U+202F). Grouping: SI Brochure, 9th ed., 5.4.4.
    pub fn typographic(&self) -> String {
        let sign = if self.negative { "\u{2212}" } else { "" };
        let digits = grouped(&self.digits);
        match self.exponent {
            Some(exponent) => format!("{sign}{digits}{}", times_power_of_ten(exponent)),
            None => format!("{sign}{digits}"),
        }
    }

    /// Value and margin for the page, from [`value_with_uncertainty`]: `13.025 ± 0.004`,
    /// `(1.235 ± 0.013) × 10⁻⁷`.
    pub fn plus_minus(&self, margin: &Numeral) -> String {
        let digits = |numeral: &Numeral| {
            Numeral {
                exponent: None,
                ..numeral.clone()
            }
            .typographic()
        };
        let both = format!(
            "{}{NARROW_SPACE}±{NARROW_SPACE}{}",
            digits(self),
            digits(margin)
        );
        match self.exponent {
            Some(exponent) if margin.exponent == self.exponent => {
                format!("({both}){}", times_power_of_ten(exponent))
            }
            None if margin.exponent.is_none() => both,
            _ => format!(
                "{}{NARROW_SPACE}±{NARROW_SPACE}{}",
                self.typographic(),
                margin.typographic()
            ),
        }
    }

    fn spell(value: f64, round: impl FnOnce(Decimal) -> Decimal) -> Numeral {
        if value.is_nan() {
            return Numeral {
                negative: false,
                digits: "NaN".to_owned(),
                exponent: None,
            };
        }
        if value.is_infinite() {
            return Numeral {
                negative: value < 0.0,
                digits: "inf".to_owned(),
                exponent: None,
            };
        }
        let decimal = round(Decimal::of_magnitude(value.abs()));
        let exponent = decimal.power_of_ten();
        decimal.numeral(value < 0.0, exponent)
    }
}

/// A value and its uncertainty, spelled to the same decimal place and with the same power of ten.
///
/// The uncertainty gets two significant digits and is rounded up, except that an excess below a
/// tenth of the last digit is dropped: GUM (JCGM 100:2008) 7.2.6 rounds 10.47 up to 11 and 28.05
/// down to 28. The value is rounded to match, ties to even. No digit beyond the 17th of the value
/// is printed. Without an uncertainty (zero or not finite) the value keeps all its digits.
pub fn value_with_uncertainty(value: f64, uncertainty: f64) -> (Numeral, Numeral) {
    let uncertainty = uncertainty.abs();
    if !value.is_finite() || !uncertainty.is_finite() || uncertainty == 0.0 {
        return (Numeral::shortest(value), Numeral::shortest(uncertainty));
    }
    let exact = Decimal::of_magnitude(value.abs());
    let mut margin = Decimal::of_magnitude(uncertainty).significant(2, Rounding::UpSensibly);
    let last_place_of_value = exact.exponent - 16;
    if !exact.is_zero() && margin.last_place() < last_place_of_value {
        margin = Decimal::of_magnitude(uncertainty).at_place(last_place_of_value, Rounding::Up);
    }
    let rounded = exact.at_place(margin.last_place(), Rounding::HalfEven);
    let value_leads = !rounded.is_zero() && rounded.exponent > margin.exponent;
    let larger = if value_leads { &rounded } else { &margin };
    let exponent = larger.power_of_ten();
    (
        rounded.numeral(value < 0.0, exponent),
        margin.numeral(false, exponent),
    )
}

/// Superscript digits and minus sign for an integer: `⁻¹²`.
pub(crate) fn superscript(number: i32) -> String {
    const DIGITS: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    number
        .to_string()
        .bytes()
        .map(|byte| match byte {
            b'0'..=b'9' => DIGITS[usize::from(byte - b'0')],
            _ => '⁻',
        })
        .collect()
}

const NARROW_SPACE: char = '\u{202F}';

fn times_power_of_ten(exponent: i32) -> String {
    format!("{NARROW_SPACE}×{NARROW_SPACE}10{}", superscript(exponent))
}

/// No f64 has a digit outside these places.
fn clamp_place(places: i32) -> i32 {
    places.clamp(-400, 1100)
}

#[derive(Clone, Copy, PartialEq)]
enum Rounding {
    HalfEven,
    Up,
    /// Up, unless the excess is below a tenth of the last digit.
    UpSensibly,
}

/// The decimal d₀.d₁d₂… × 10^exponent; d₀ is not 0 unless the number is.
#[derive(Clone)]
struct Decimal {
    digits: Vec<u8>,
    exponent: i32,
}

impl Decimal {
    fn of_magnitude(magnitude: f64) -> Decimal {
        let text = format!("{magnitude:e}");
        let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
        let digits = mantissa
            .bytes()
            .filter(u8::is_ascii_digit)
            .map(|byte| byte - b'0')
            .collect();
        Decimal {
            digits,
            exponent: exponent.parse().unwrap_or(0),
        }
    }

    fn is_zero(&self) -> bool {
        self.digits.iter().all(|&digit| digit == 0)
    }

    /// Place of the last digit: −2 for hundredths.
    fn last_place(&self) -> i32 {
        self.exponent - self.digits.len() as i32 + 1
    }

    fn significant(self, digits: usize, rounding: Rounding) -> Decimal {
        let count = digits.clamp(1, 17) as i32;
        let place = if self.is_zero() {
            1 - count
        } else {
            self.exponent - count + 1
        };
        let mut rounded = self.at_place(place, rounding);
        if rounded.digits.len() as i32 > count && !rounded.is_zero() {
            rounded.digits.pop(); // a carry made 9.99 into 10.00: the last zero is one too many
        }
        rounded
    }

    fn at_place(mut self, place: i32, rounding: Rounding) -> Decimal {
        let kept = self.exponent - place + 1;
        if kept >= self.digits.len() as i32 && !self.is_zero() {
            self.digits.resize(kept as usize, 0);
            return self;
        }
        let kept_digits = kept.clamp(0, self.digits.len() as i32) as usize;
        let mut rest = self.digits.split_off(kept_digits);
        if kept < 0 {
            rest.insert(0, 0);
        }
        let last_is_odd = self.digits.last().is_some_and(|digit| digit % 2 == 1);
        if rounds_away(&rest, last_is_odd, rounding) {
            if let Some(position) = self.digits.iter().rposition(|&digit| digit < 9) {
                self.digits[position] += 1;
                self.digits[position + 1..].fill(0);
            } else {
                self.digits.fill(0);
                self.digits.insert(0, 1);
                self.exponent = place + self.digits.len() as i32 - 1;
            }
        }
        if self.is_zero() {
            self.digits = vec![0; (1 - place).max(1) as usize];
            self.exponent = place.max(0);
        }
        self
    }

    /// The power of ten that scientific notation would take out, where it is to be used.
    fn power_of_ten(&self) -> Option<i32> {
        (!self.is_zero() && !(-4..6).contains(&self.exponent)).then_some(self.exponent)
    }

    fn numeral(&self, negative: bool, exponent: Option<i32>) -> Numeral {
        if self.is_zero() {
            let places = (exponent.unwrap_or(0) - self.last_place()).max(0) as usize;
            let digits = if places > 0 {
                format!("0.{}", "0".repeat(places))
            } else {
                "0".to_owned()
            };
            return Numeral {
                negative: false,
                digits,
                exponent,
            };
        }
        let leading = self.exponent - exponent.unwrap_or(0);
        let mut digits = String::new();
        if leading < 0 {
            digits.push_str("0.");
            digits.extend(std::iter::repeat_n('0', (-leading - 1) as usize));
        }
        for (index, &digit) in self.digits.iter().enumerate() {
            if index as i32 == leading + 1 && leading >= 0 {
                digits.push('.');
            }
            digits.push(char::from(b'0' + digit));
        }
        let missing = leading + 1 - self.digits.len() as i32;
        digits.extend(std::iter::repeat_n('0', missing.max(0) as usize));
        Numeral {
            negative,
            digits,
            exponent,
        }
    }
}

fn rounds_away(rest: &[u8], last_is_odd: bool, rounding: Rounding) -> bool {
    let Some((&first, further)) = rest.split_first() else {
        return false;
    };
    let more = further.iter().any(|&digit| digit > 0);
    match rounding {
        Rounding::HalfEven => first > 5 || (first == 5 && (more || last_is_odd)),
        Rounding::Up => first > 0 || more,
        Rounding::UpSensibly => first > 0,
    }
}

/// Groups of three on both sides of the point, each side only from five digits on.
fn grouped(digits: &str) -> String {
    if !digits
        .bytes()
        .all(|byte| byte.is_ascii_digit() || byte == b'.')
    {
        return digits.to_owned();
    }
    let (whole, fraction) = digits.split_once('.').unwrap_or((digits, ""));
    let mut text = String::new();
    for (index, digit) in whole.chars().enumerate() {
        if index > 0 && whole.len() >= 5 && (whole.len() - index).is_multiple_of(3) {
            text.push(NARROW_SPACE);
        }
        text.push(digit);
    }
    if !fraction.is_empty() {
        text.push('.');
    }
    for (index, digit) in fraction.chars().enumerate() {
        if index > 0 && fraction.len() >= 5 && index.is_multiple_of(3) {
            text.push(NARROW_SPACE);
        }
        text.push(digit);
    }
    text
}
