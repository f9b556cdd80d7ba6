//! Literal numbers: decimals, SI prefixes, units, IEC 60062 codes, decibels; exact throughout.

use crate::algebra::{Integer, Rational};
use crate::language::syntax::{Literal, Suffix};
use crate::network::Dimension;
use crate::source::Span;

/// Largest power of ten a literal may hold.
const MAX_EXPONENT: i32 = 1000;

/// Why a literal is none.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum NumberError {
    /// The exponent is beyond the limit.
    Exponent,
    /// Not a number.
    Form,
}

fn ten(exponent: i32) -> Rational {
    Rational::from(10_i64)
        .pow(exponent)
        .unwrap_or_else(Rational::one)
}

fn prefix(letter: char) -> Option<(i32, &'static str)> {
    Some(match letter {
        'a' => (-18, "atto"),
        'f' => (-15, "femto"),
        'p' => (-12, "pico"),
        'n' => (-9, "nano"),
        'u' | 'µ' | 'μ' => (-6, "micro"),
        'm' => (-3, "milli"),
        'k' => (3, "kilo"),
        'M' => (6, "mega"),
        'G' => (9, "giga"),
        'T' => (12, "tera"),
        'P' => (15, "peta"),
        'E' => (18, "exa"),
        _ => return None,
    })
}

struct Unit {
    dimension: Dimension,
    word: &'static str,
    in_hertz: bool,
}

fn unit(text: &str) -> Option<Unit> {
    let plain = |dimension, word| Unit {
        dimension,
        word,
        in_hertz: false,
    };
    Some(match text {
        "Ω" | "\u{2126}" | "ohm" => plain(Dimension::OHM, "ohms"),
        "F" => plain(Dimension::FARAD, "farads"),
        "H" => plain(Dimension::HENRY, "henries"),
        "S" => plain(Dimension::SIEMENS, "siemens"),
        "V" => plain(Dimension::VOLT, "volts"),
        "A" => plain(Dimension::AMPERE, "amperes"),
        "s" => plain(Dimension::SECOND, "seconds"),
        "rad/s" => plain(Dimension::PER_SECOND, "radians per second"),
        "W" => plain(Dimension::of(1, 1, 0), "watts"),
        "K" | "°C" | "degC" => plain(
            Dimension {
                kelvin: 1,
                ..Dimension::NUMBER
            },
            "kelvins",
        ),
        "Hz" => Unit {
            in_hertz: true,
            ..plain(Dimension::PER_SECOND, "hertz")
        },
        _ => return None,
    })
}

/// Reads a literal. `suffix` is the unit or prefix behind the number; `attached` tells whether it
/// stands without a blank.
pub(crate) fn read(
    magnitude: &str,
    suffix: &str,
    attached: bool,
    place: Span,
) -> Result<Literal, NumberError> {
    let (mut value, code_dimension) = read_magnitude(magnitude)?;
    let mut literal = Literal {
        value: Rational::zero(),
        dimension: code_dimension,
        in_hertz: false,
        percent: false,
        suffix: None,
        rounded: false,
        place,
    };
    let mut reading = None;
    match suffix {
        "" => {}
        "%" => {
            value = &value * &ten(-2);
            literal.percent = true;
            literal.dimension = Some(Dimension::NUMBER);
        }
        "dB" => {
            (value, literal.rounded) = decibels(&value);
            literal.dimension = Some(Dimension::NUMBER);
            reading = Some("decibels".to_owned());
        }
        "R" => literal.dimension = Some(Dimension::OHM),
        // `10K` is ten kilo; kelvins need a blank.
        "K" if attached => value = &value * &ten(3),
        "°C" | "degC" => {
            let zero = Rational::new(Integer::from(27_315), Integer::from(100));
            value = &value + &zero.unwrap_or_else(Rational::zero);
            literal.dimension = unit("K").map(|unit| unit.dimension);
        }
        _ => {
            if let Some(found) = unit(suffix) {
                literal.dimension = Some(found.dimension);
                literal.in_hertz = found.in_hertz;
                reading = Some(found.word.to_owned());
            } else {
                let letter = suffix.chars().next().ok_or(NumberError::Form)?;
                let (exponent, word) = prefix(letter).ok_or(NumberError::Form)?;
                value = &value * &ten(exponent);
                let rest = &suffix[letter.len_utf8()..];
                reading = Some(word.to_owned());
                if !rest.is_empty() {
                    let found = unit(rest).ok_or(NumberError::Form)?;
                    literal.dimension = Some(found.dimension);
                    literal.in_hertz = found.in_hertz;
                    reading = Some(format!("{word}{}", found.word));
                }
            }
        }
    }
    if let Some(reading) = reading {
        literal.suffix = Some(Box::new(Suffix {
            text: suffix.to_owned(),
            reading: format!("{magnitude} {reading}"),
            number: magnitude.to_owned(),
        }));
    }
    literal.value = value;
    Ok(literal)
}

/// Digits with a point, an exponent, or a code letter in place of the point.
fn read_magnitude(text: &str) -> Result<(Rational, Option<Dimension>), NumberError> {
    let letter = text
        .char_indices()
        .find(|(_, c)| c.is_alphabetic() && !matches!(c, 'e' | 'E'));
    if let Some((at, letter)) = letter {
        let (whole, rest) = (&text[..at], &text[at + letter.len_utf8()..]);
        let number = decimal(&format!(
            "{}.{rest}",
            if whole.is_empty() { "0" } else { whole }
        ))?;
        let (exponent, dimension) = match letter {
            'R' => (0, Some(Dimension::OHM)),
            'F' => (0, Some(Dimension::FARAD)),
            'H' | 'L' => (0, Some(Dimension::HENRY)),
            'K' => (3, None),
            other => (prefix(other).ok_or(NumberError::Form)?.0, None),
        };
        return Ok((&number * &ten(exponent), dimension));
    }
    Ok((decimal(text)?, None))
}

fn decimal(text: &str) -> Result<Rational, NumberError> {
    let (mantissa, exponent) = match text.find(['e', 'E']) {
        Some(at) => (&text[..at], text[at + 1..].replace('−', "-")),
        None => (text, "0".to_owned()),
    };
    let exponent: i32 = exponent.parse().map_err(|_| NumberError::Exponent)?;
    if exponent.abs() > MAX_EXPONENT {
        return Err(NumberError::Exponent);
    }
    let (whole, part) = mantissa.split_once('.').unwrap_or((mantissa, ""));
    let digits: Integer = format!("{whole}{part}")
        .parse()
        .map_err(|_| NumberError::Form)?;
    let places = i32::try_from(part.len()).map_err(|_| NumberError::Form)?;
    Ok(&Rational::from(digits) * &ten(exponent - places))
}

/// 10^(x/20): exact for multiples of 20, else to twelve digits; the flag says that it was rounded.
fn decibels(value: &Rational) -> (Rational, bool) {
    let twentieth =
        value * &ten(-1) * Rational::new(1.into(), 2.into()).unwrap_or_else(Rational::one);
    if twentieth.is_integer()
        && let Some(exponent) = twentieth.numerator().to_i64()
        && let Ok(exponent) = i32::try_from(exponent)
        && exponent.abs() <= MAX_EXPONENT
    {
        return (ten(exponent), false);
    }
    (root_of_power(&twentieth), true)
}

/// 10^x to twelve significant digits, by the integer root of a power: 10^(p/q) = (10^p)^(1/q).
fn root_of_power(exponent: &Rational) -> Rational {
    let floor = exponent.numerator().div_floor(exponent.denominator());
    let whole = floor
        .to_i64()
        .and_then(|n| i32::try_from(n).ok())
        .unwrap_or(0);
    let whole = whole.clamp(-MAX_EXPONENT, MAX_EXPONENT);
    let rest = exponent + &-Rational::from(floor);
    // Bisection on the mantissa m of 1 … 10 with m^q against 10^p.
    let (p, q) = (rest.numerator(), rest.denominator());
    let (Some(p), Some(q)) = (p.to_i64(), q.to_i64()) else {
        return ten(whole);
    };
    let (Ok(p), Ok(q)) = (u32::try_from(p), u32::try_from(q)) else {
        return ten(whole);
    };
    if q > 2000 {
        return ten(whole);
    }
    let scale = Integer::from(10).pow(12);
    let target = Integer::from(10).pow(p) * scale.pow(q);
    let (mut low, mut high) = (scale.clone(), scale.clone() * Integer::from(10));
    while &high - &low > Integer::one() {
        let middle = (&low + &high).div_floor(&Integer::from(2));
        if middle.pow(q) > target {
            high = middle;
        } else {
            low = middle;
        }
    }
    let mantissa = Rational::new(low, scale).unwrap_or_else(Rational::one);
    &mantissa * &ten(whole)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Sources;

    fn value(magnitude: &str, suffix: &str, attached: bool) -> Rational {
        let place = Span::new(Sources::new().add("", ""), 0, 0);
        read(magnitude, suffix, attached, place)
            .expect("a number")
            .value
    }

    fn ratio(a: i64, b: i64) -> Rational {
        Rational::new(a.into(), b.into()).expect("not zero")
    }

    #[test]
    fn iec_60062_codes() {
        // source: IEC 60062 letter codes, from memory
        assert_eq!(value("4k7", "", true), ratio(4700, 1));
        assert_eq!(value("4K7", "", true), ratio(4700, 1));
        assert_eq!(value("0R22", "", true), ratio(22, 100));
        assert_eq!(value("R47", "", true), ratio(47, 100));
        assert_eq!(value("4n7", "", true), ratio(47, 10_000_000_000));
        assert_eq!(value("p33", "", true), ratio(33, 100_000_000_000_000));
        assert_eq!(value("1M5", "", true), ratio(1_500_000, 1));
        assert_eq!(value("10", "R", true), ratio(10, 1));
        assert_eq!(value("10", "K", true), ratio(10_000, 1));
        assert_eq!(value("300", "K", false), ratio(300, 1));
    }

    #[test]
    fn prefixes_units_and_decibels() {
        assert_eq!(value("10", "kΩ", false), ratio(10_000, 1));
        assert_eq!(value("100", "nF", false), ratio(1, 10_000_000));
        assert_eq!(value("1", "MHz", false), ratio(1_000_000, 1));
        assert_eq!(value("3", "m", true), ratio(3, 1000));
        assert_eq!(value("80", "dB", false), ratio(10_000, 1));
        assert_eq!(value("5", "%", false), ratio(1, 20));
        let root_ten = value("10", "dB", false);
        assert_eq!(root_ten, ratio(3_162_277_660_168, 1_000_000_000_000));
    }
}
