//! The tables of this crate: tab-separated text, one row a line; `#` begins a comment, `-` is an empty field.

use crate::{Exact, Exponent};
use leastwise_algebra::Rational;

/// Digits that a number of a table may have.
const MAX_DIGITS: usize = 400;

/// The rows of a table that have to have so many columns.
pub(crate) fn rows<const N: usize>(text: &'static str) -> Result<Vec<[&'static str; N]>, String> {
    let lines = text.lines().enumerate().filter(|(_, line)| !line.starts_with('#') && !line.is_empty());
    lines
        .map(|(k, line)| {
            let fields: Vec<&str> = line.split('\t').map(|f| if f == "-" { "" } else { f }).collect();
            fields.try_into().map_err(|f: Vec<&str>| format!("line {}: {} columns, not {N}", k + 1, f.len()))
        })
        .collect()
}

/// A decimal number, and its standard uncertainty where the last digits have one: `6.67430(15)e-11`.
pub(crate) fn number(text: &str) -> Option<(Rational, Option<Rational>)> {
    let (negative, text) = text.strip_prefix('-').map_or((false, text), |rest| (true, rest));
    let (mantissa, exponent) = text.split_once('e').map_or(Some((text, 0)), |(m, e)| Some((m, e.parse().ok()?)))?;
    let (mantissa, uncertain) = match mantissa.split_once('(') {
        Some((m, rest)) => (m, Some(rest.strip_suffix(')')?)),
        None => (mantissa, None),
    };
    let places = mantissa.split_once('.').map_or(0, |(_, tail)| tail.len()) as i32;
    let scaled = |digits: &str| Rational::from_decimal(digits, exponent - places, MAX_DIGITS);
    let value = scaled(&mantissa.replacen('.', "", 1))?;
    let uncertainty = match uncertain {
        Some(digits) => Some(scaled(digits)?),
        None => None,
    };
    Some((if negative { value.neg() } else { value }, uncertainty))
}

/// A product of numbers, `π`, names that `known` knows, and their whole powers; `/` stands before each divisor.
/// One number alone may have an uncertainty.
pub(crate) fn value(text: &str, known: impl Fn(&str) -> Option<Exact>) -> Result<(Exact, Option<Rational>), String> {
    if let Some((value, uncertainty)) = number(text) {
        return Ok((Exact::rational(value), uncertainty));
    }
    let (mut out, mut divide) = (Exact::ONE, false);
    for word in text.split_whitespace() {
        if word == "/" {
            divide = true;
            continue;
        }
        let (base, power) = word.split_once('^').unwrap_or((word, "1"));
        let base = match (base, number(base)) {
            ("π", _) => Exact::PI,
            (_, Some((value, None))) => Exact::rational(value),
            _ => known(base).ok_or_else(|| format!("`{base}` is not known"))?,
        };
        let power: i16 = power.parse().map_err(|_| format!("`{power}` is no power"))?;
        let power = if divide { -power } else { power };
        let factor = base.pow(Exponent::whole(power));
        out = factor.and_then(|f| out.times(&f)).ok_or_else(|| format!("`{text}` is too large"))?;
        divide = false;
    }
    Ok((out, None))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_with_their_uncertainty() {
        let check = |text: &str, value: &str, uncertainty: &str| {
            let (v, u) = number(text).expect("a number");
            assert_eq!(
                (v.to_string().as_str(), u.map_or(String::new(), |u| u.to_string()).as_str()),
                (value, uncertainty)
            );
        };
        check("60", "60", "");
        check("-2.5", "-5/2", "");
        check("1.5e-2", "3/200", "");
        check("6.6(15)e-1", "33/50", "3/20");
        assert_eq!(number("x"), None);
        assert_eq!(number("1(2"), None);
    }

    #[test]
    fn products() {
        let known = |name: &str| (name == "h").then(|| Exact::integer(6));
        let check =
            |text: &str, shown: &str| assert_eq!(value(text, known).map(|v| v.0.to_string()), Ok(shown.to_owned()));
        check("π / 180", "π/180");
        check("h / 2 / π", "3/π");
        check("2 π^2 / h^2", "π²/18");
        assert_eq!(value("2 y", known), Err("`y` is not known".to_owned()));
        assert_eq!(value("h^x", known), Err("`x` is no power".to_owned()));
    }

    #[test]
    fn rows_have_their_columns() {
        assert_eq!(rows::<2>("# a\tb\nx\t-\n"), Ok(vec![["x", ""]]));
        assert_eq!(rows::<2>("\nx"), Err("line 2: 1 columns, not 2".to_owned()));
    }
}
