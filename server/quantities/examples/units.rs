//! Prints what this crate makes of units, for comparisons with other programs.
//!
//! Reads lines of units, and prints for each `p n k exponents`: a factor ± p^(1/n) · π^k and the exponents of m, kg, s, A,
//! K, mol, cd; or `error: …`. `units constants` prints the constants, `units prefixes` the prefixes,
//! `units symbols` all symbols without prefixes.

use leastwise_quantities::{Compound, Exact, constants, prefixes, units};
use std::io::{self, BufRead, Write};

fn main() -> io::Result<()> {
    let mut out = io::BufWriter::new(io::stdout().lock());
    match std::env::args().nth(1).as_deref() {
        Some("constants") => {
            for c in constants() {
                let uncertainty = c.uncertainty.as_ref().map_or("0".to_owned(), |u| u.to_string());
                let fields = [c.symbol, c.codata, &parts(&c.value), &uncertainty, &c.unit.plain()];
                writeln!(out, "{}", fields.join("\t"))?;
            }
        }
        Some("symbols") => {
            for u in units() {
                writeln!(out, "{}", u.symbol)?;
            }
        }
        Some("prefixes") => {
            for p in prefixes() {
                writeln!(out, "{}\t{}\t{}", p.symbol, p.name, p.factor())?;
            }
        }
        _ => {
            for line in io::stdin().lock().lines() {
                match answer(&line?) {
                    Ok(text) => writeln!(out, "{text}")?,
                    Err(error) => writeln!(out, "error: {error}")?,
                }
            }
        }
    }
    out.flush()
}

fn answer(text: &str) -> Result<String, leastwise_quantities::UnitError> {
    let unit = Compound::read(text)?;
    let exponents = unit.dimension().exponents().map(|e| e.to_string());
    Ok(format!("{} {}", parts(unit.factor()?), exponents.join(" ")))
}

fn parts(x: &Exact) -> String {
    let (power, root, pi) = x.parts();
    format!("{power} {root} {pi}")
}
