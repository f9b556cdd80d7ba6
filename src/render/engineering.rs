//! Numbers as an engineer writes them: three significant digits, SI prefixes. Blanks inside a number
//! with its unit do not break; writers make of them what their page needs.

use nalgebra::Complex;

/// Significant digits.
const DIGITS: usize = 3;

const PREFIXES: [(i32, &str); 11] = [
    (-15, "f"),
    (-12, "p"),
    (-9, "n"),
    (-6, "µ"),
    (-3, "m"),
    (0, ""),
    (3, "k"),
    (6, "M"),
    (9, "G"),
    (12, "T"),
    (15, "P"),
];

/// `8.33 krad/s`, `−120 µs`, `0`.
#[must_use]
pub fn quantity(value: f64, unit: &str) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    let (digits, exponent) = significant(value);
    let group = exponent.div_euclid(3) * 3;
    let sign = if value < 0.0 { "−" } else { "" };
    match PREFIXES.iter().find(|(power, _)| *power == group) {
        Some((_, prefix)) => {
            let number = placed(&digits, exponent - group);
            let blank = if unit.is_empty() && prefix.is_empty() {
                ""
            } else {
                "\u{a0}"
            };
            format!("{sign}{number}{blank}{prefix}{unit}")
        }
        None => format!("{sign}{}e{exponent}\u{a0}{unit}", placed(&digits, 0))
            .trim_end()
            .to_owned(),
    }
}

/// `0.0227`, `−53.2`, `1.20e-7`.
#[must_use]
pub fn plain(value: f64) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    let (digits, exponent) = significant(value);
    let sign = if value < 0.0 { "−" } else { "" };
    if (-4..6).contains(&exponent) {
        format!("{sign}{}", placed(&digits, exponent))
    } else {
        format!("{sign}{}e{exponent}", placed(&digits, 0))
    }
}

/// `12.5 %`, `0.36 %`, `< 0.001 %`, `more than 1000 %`.
#[must_use]
pub fn percent(fraction: f64) -> String {
    let value = fraction * 100.0;
    if value == 0.0 {
        return "0\u{a0}%".to_owned();
    }
    if value.abs() < 0.001 {
        return "less than 0.001\u{a0}%".to_owned();
    }
    if value.abs() >= 999.5 {
        return "more than 1000\u{a0}%".to_owned();
    }
    let (digits, exponent) = significant(value);
    let sign = if value < 0.0 { "−" } else { "" };
    format!("{sign}{}\u{a0}%", placed(&digits, exponent))
}

/// `−8.33 krad/s`, or `(−1.00 k ± j 2.00 k) rad/s` for a number with an imaginary part.
#[must_use]
pub fn place(value: Complex<f64>, unit: &str, pair: bool) -> String {
    if value.im == 0.0 {
        return quantity(value.re, unit);
    }
    let sign = match (pair, value.im < 0.0) {
        (true, _) => "±",
        (false, true) => "−",
        (false, false) => "+",
    };
    let real = if value.re == 0.0 {
        String::new()
    } else {
        format!("{}\u{a0}", quantity(value.re, ""))
    };
    let imaginary = quantity(value.im.abs(), "");
    format!("({real}{sign}\u{a0}j\u{a0}{imaginary})\u{a0}{unit}")
}

/// Digits and decimal exponent of the first.
fn significant(value: f64) -> (String, i32) {
    let text = format!("{:.*e}", DIGITS - 1, value.abs());
    let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
    let digits = mantissa.chars().filter(char::is_ascii_digit).collect();
    (digits, exponent.parse().unwrap_or(0))
}

/// The digits with the decimal point behind the first and `exponent` more.
fn placed(digits: &str, exponent: i32) -> String {
    if exponent < 0 {
        let zeros = usize::try_from(-exponent - 1).unwrap_or(0);
        return format!("0.{}{digits}", "0".repeat(zeros));
    }
    let whole = usize::try_from(exponent + 1).unwrap_or(1);
    if whole >= digits.len() {
        return format!("{digits}{}", "0".repeat(whole - digits.len()));
    }
    format!("{}.{}", &digits[..whole], &digits[whole..])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantities_carry_prefixes() {
        let cases = [
            (8333.33, "8.33 krad/s"),
            (-0.000_12, "−120 µrad/s"),
            (999.6, "1.00 krad/s"),
            (12.0, "12.0 rad/s"),
            (1e-18, "1.00e-18 rad/s"),
            (0.0, "0"),
        ];
        for (value, text) in cases {
            assert_eq!(quantity(value, "rad/s").replace('\u{a0}', " "), text);
        }
        assert_eq!(quantity(470.0, ""), "470");
    }

    #[test]
    fn fractions_as_per_cent() {
        let cases = [
            (0.125, "12.5 %"),
            (0.003_6, "0.360 %"),
            (-1.0, "−100 %"),
            (1e-7, "less than 0.001 %"),
            (37.0, "more than 1000 %"),
        ];
        for (value, text) in cases {
            assert_eq!(percent(value).replace('\u{a0}', " "), text);
        }
    }

    #[test]
    fn complex_places() {
        let place_of =
            |re, im, pair| place(Complex::new(re, im), "rad/s", pair).replace('\u{a0}', " ");
        assert_eq!(
            place_of(-1000.0, 2000.0, true),
            "(−1.00 k ± j 2.00 k) rad/s"
        );
        assert_eq!(place_of(-1.0, -2.0, false), "(−1.00 − j 2.00) rad/s");
        assert_eq!(place_of(0.0, 2.0, true), "(± j 2.00) rad/s");
    }
}
