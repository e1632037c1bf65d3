//! Turns the tables of units, prefixes and quantities into static arrays, so that looking one up costs next to nothing.
//! What a column means is said at the head of each table.

use std::fmt::Write;
use std::path::Path;
use std::{env, fs};

fn main() {
    let text =
        |name: &str| fs::read_to_string(format!("tables/{name}.tsv")).unwrap_or_else(|e| panic!("{name}.tsv: {e}"));
    let out = env::var("OUT_DIR").expect("cargo names the folder");
    let write = |name: &str, code: String| {
        fs::write(Path::new(&out).join(name), code).unwrap_or_else(|e| panic!("{name}: {e}"));
    };
    write("prefixes.rs", prefixes(&text("prefixes")));
    write("units.rs", units(&text("units")));
    write("quantities.rs", quantities(&text("quantities")));
}

/// The rows of a table; an empty field is `-`.
fn rows<const N: usize>(text: &str) -> Vec<[&str; N]> {
    let lines = text.lines().filter(|line| !line.starts_with('#') && !line.is_empty());
    lines
        .map(|line| {
            let fields: Vec<&str> = line.split('\t').map(|f| if f == "-" { "" } else { f }).collect();
            fields.try_into().unwrap_or_else(|f: Vec<&str>| panic!("`{line}`: {} columns, not {N}", f.len()))
        })
        .collect()
}

fn prefixes(text: &str) -> String {
    let rows = rows::<3>(text);
    let mut code = format!("static PREFIXES: [Prefix; {}] = [\n", rows.len());
    for [symbol, name, exponent] in rows {
        let exponent: i32 = exponent.parse().unwrap_or_else(|_| panic!("{name}: `{exponent}` is no number"));
        let _ = writeln!(code, "Prefix {{ symbol: {symbol:?}, name: {name:?}, exponent: {exponent} }},");
    }
    code + "];\n"
}

fn units(text: &str) -> String {
    let rows = rows::<11>(text);
    let mut code = format!("static UNITS: [Unit; {}] = [\n", rows.len());
    let mut symbols = Vec::new();
    for (k, [symbol, aliases, name, group, given, of, dimension, angle, taken, mark, remark]) in
        rows.into_iter().enumerate()
    {
        let aliases: Vec<&str> = aliases.split_whitespace().collect();
        symbols.extend([symbol].into_iter().chain(aliases.iter().copied()).map(|s| (s.to_owned(), k)));
        let taken = match taken {
            "all" => "Prefixes::All".to_owned(),
            "none" => "Prefixes::Only(&[])".to_owned(),
            list => format!("Prefixes::Only(&{:?})", list.split_whitespace().collect::<Vec<_>>()),
        };
        let angle: i16 =
            if angle.is_empty() { 0 } else { angle.parse().unwrap_or_else(|_| panic!("{symbol}: angle `{angle}`")) };
        let _ = writeln!(
            code,
            "Unit {{ symbol: {symbol:?}, aliases: &{aliases:?}, name: {name:?}, group: Group::{}, dimension: {}, \
             angle: Exponent::whole({angle}), prefixes: {taken}, mark: Mark::{}, remark: {remark:?}, \
             given: {given:?}, of: {of:?}, value: OnceLock::new() }},",
            capital(group),
            dimension_code(symbol, dimension),
            if mark.is_empty() { "None".to_owned() } else { capital(mark) },
        );
    }
    code + "];\n" + &index("SYMBOLS", symbols)
}

fn quantities(text: &str) -> String {
    let rows = rows::<7>(text);
    let mut code = format!("static QUANTITIES: [Quantity; {}] = [\n", rows.len());
    let names = rows.iter().enumerate().map(|(k, row)| (row[0].to_owned(), k)).collect();
    for [name, item, unit, usual, dimension, rank, description] in rows {
        assert!(["", "*", "+", "*+"].contains(&rank), "{name}: rank `{rank}`");
        let usual = if usual.is_empty() { unit } else { usual };
        let _ = writeln!(
            code,
            "Quantity {{ name: {name:?}, item: {item:?}, dimension: {}, first: {}, everyday: {}, \
             description: {description:?}, spelled: [{unit:?}, {usual:?}], unit: OnceLock::new(), usual: OnceLock::new() }},",
            dimension_code(name, dimension),
            rank.starts_with('*'),
            rank.ends_with('+'),
        );
    }
    code + "];\n" + &index("NAMES", names)
}

/// Names with their rows, sorted for a binary search.
fn index(name: &str, mut list: Vec<(String, usize)>) -> String {
    list.sort();
    for pair in list.windows(2) {
        assert!(pair[0].0 != pair[1].0, "{} stands twice", pair[0].0);
    }
    format!("static {name}: [(&str, usize); {}] = {list:?};\n", list.len())
}

/// `L² M T⁻²` as code.
fn dimension_code(of: &str, text: &str) -> String {
    let mut exponents = [0_i16; 7];
    for factor in text.split_whitespace().filter(|f| *f != "1") {
        let end = factor.find(|c| "⁻⁰¹²³⁴⁵⁶⁷⁸⁹".contains(c)).unwrap_or(factor.len());
        let (symbol, power) = factor.split_at(end);
        let at = ["L", "M", "T", "I", "Θ", "N", "J"].iter().position(|s| *s == symbol);
        let lowered: String = power.chars().map(lowered).collect();
        let power = if lowered.is_empty() { Ok(1) } else { lowered.parse() };
        let (Some(at), Ok(power)) = (at, power) else { panic!("{of}: dimension `{text}`") };
        exponents[at] = power;
    }
    let list: Vec<String> = exponents.iter().map(|n| format!("Exponent::whole({n})")).collect();
    format!("Dimension::new([{}])", list.join(", "))
}

fn lowered(c: char) -> char {
    let digit = "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().position(|r| r == c).and_then(|n| char::from_digit(n as u32, 10));
    digit.unwrap_or('-')
}

fn capital(word: &str) -> String {
    let mut letters = word.chars();
    letters.next().map_or(String::new(), |first| first.to_uppercase().chain(letters).collect())
}
