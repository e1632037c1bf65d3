//! Reads units as they are printed and as the tables of this crate spell them.
//!
//! A product of powers, side by side or with `·`, `*`; one `/`, behind which a product needs parentheses; `1/s`. Powers
//! are `²`, `^2`, `^-1`, `^(1/2)`.

use crate::Exponent;
use crate::exponent::lowered_digit;

/// The symbols of a unit and their exponents.
pub fn read(text: &str) -> Result<Vec<(String, Exponent)>, String> {
    let text = text.trim();
    let Some((above, below)) = split_at_quotient(text) else { return product(text) };
    let mut out = product(above.trim())?;
    let below = below.trim();
    let bare = below.strip_prefix('(').and_then(|b| b.strip_suffix(')'));
    let divisors = product(bare.unwrap_or(below))?;
    if bare.is_none() && divisors.len() > 1 {
        return Err(format!("`{text}`: a product behind `/` needs parentheses"));
    }
    if divisors.is_empty() {
        return Err(format!("`{text}`: nothing stands behind `/`"));
    }
    out.extend(divisors.into_iter().map(|(symbol, e)| (symbol, e.negative())));
    Ok(out)
}

/// Both sides of the `/` that stands outside of brackets, as in `m^(1/2)/s`.
fn split_at_quotient(text: &str) -> Option<(&str, &str)> {
    let mut open = 0_i32;
    let at = text.char_indices().find(|(_, c)| {
        open += i32::from(*c == '(') - i32::from(*c == ')');
        *c == '/' && open == 0
    })?;
    Some((&text[..at.0], &text[at.0 + 1..]))
}

fn product(text: &str) -> Result<Vec<(String, Exponent)>, String> {
    if text == "1" {
        return Ok(Vec::new());
    }
    let mut out = Vec::new();
    let mut rest = text;
    while let Some(start) = rest.find(|c: char| !c.is_whitespace() && !matches!(c, '·' | '*')) {
        rest = &rest[start..];
        let end = rest.find(|c: char| c.is_whitespace() || "·*/^()".contains(c) || lowered_digit(c).is_some());
        let (symbol, after) = rest.split_at(end.unwrap_or(rest.len()));
        if symbol.is_empty() {
            return Err(format!("`{text}`: no unit before `{after}`"));
        }
        let (exponent, after) = power(after).ok_or_else(|| format!("`{text}`: a power that cannot be read"))?;
        out.push((symbol.to_owned(), exponent));
        rest = after;
    }
    Ok(out)
}

/// The power at the beginning, and what follows it.
fn power(text: &str) -> Option<(Exponent, &str)> {
    let end = text.find(|c| lowered_digit(c).is_none()).unwrap_or(text.len());
    if end > 0 {
        let digits: String = text[..end].chars().filter_map(lowered_digit).collect();
        return Some((Exponent::new(digits.parse().ok()?, 1)?, &text[end..]));
    }
    let Some(text) = text.strip_prefix('^') else { return Some((Exponent::ONE, text)) };
    if let Some(inside) = text.strip_prefix('(') {
        let (fraction, rest) = inside.split_once(')')?;
        let (num, den) = fraction.split_once('/').unwrap_or((fraction, "1"));
        return Some((Exponent::new(num.parse().ok()?, den.parse().ok()?)?, rest));
    }
    let end = text.find(|c: char| !c.is_ascii_digit() && c != '-').unwrap_or(text.len());
    Some((Exponent::new(text[..end].parse().ok()?, 1)?, &text[end..]))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, expected: &str) {
        let shown = match read(text) {
            Ok(list) => list.iter().map(|(s, e)| format!("{s}:{e}")).collect::<Vec<_>>().join(" "),
            Err(message) => message,
        };
        assert_eq!(shown, expected, "{text}");
    }

    #[test]
    fn products_quotients_powers() {
        check("kg m^2", "kg:1 m:2");
        check("N·m/s²", "N:1 m:1 s:-2");
        check("N/(m s)", "N:1 m:-1 s:-1");
        check("W/(m²·K⁴)", "W:1 m:-2 K:-4");
        check("1/s", "s:-1");
        check("s⁻¹", "s:-1");
        check("m^-1", "m:-1");
        check("V/m^(1/2)", "V:1 m:-1/2");
        check("m^(-3/2)", "m:-3/2");
        check("m^(1/2) s", "m:1/2 s:1");
        check("m^(1/2)/(s^(-1/3) A)", "m:1/2 s:1/3 A:-1");
        check("1", "");
        check("°", "°:1");
    }

    #[test]
    fn what_cannot_be_read() {
        check("N/m s", "`N/m s`: a product behind `/` needs parentheses");
        check("m/", "`m/`: nothing stands behind `/`");
        check("m^x", "`m^x`: a power that cannot be read");
        check("m^", "`m^`: a power that cannot be read");
        check("m^(1/0)", "`m^(1/0)`: a power that cannot be read");
        check("m^99999999999999999999", "`m^99999999999999999999`: a power that cannot be read");
        check("^2", "`^2`: no unit before `^2`");
    }
}
