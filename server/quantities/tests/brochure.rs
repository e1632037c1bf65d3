//! The tables of the SI Brochure (9th ed., 2019, with the prefixes of 2022), written out once more and held against those
//! of this crate.

use leastwise_quantities::{Compound, Dimension, Exact, Group, prefixes, unit, units};

/// Table 7.
const PREFIXES: [(&str, &str, i32); 24] = [
    ("deca", "da", 1),
    ("hecto", "h", 2),
    ("kilo", "k", 3),
    ("mega", "M", 6),
    ("giga", "G", 9),
    ("tera", "T", 12),
    ("peta", "P", 15),
    ("exa", "E", 18),
    ("zetta", "Z", 21),
    ("yotta", "Y", 24),
    ("ronna", "R", 27),
    ("quetta", "Q", 30),
    ("deci", "d", -1),
    ("centi", "c", -2),
    ("milli", "m", -3),
    ("micro", "µ", -6),
    ("nano", "n", -9),
    ("pico", "p", -12),
    ("femto", "f", -15),
    ("atto", "a", -18),
    ("zepto", "z", -21),
    ("yocto", "y", -24),
    ("ronto", "r", -27),
    ("quecto", "q", -30),
];

/// Table 4: name, symbol, the exponents of kg, m, s, A, K, mol, cd, and another expression where the table gives one.
type Derived = (&'static str, &'static str, [i16; 7], &'static str);
const DERIVED: [Derived; 22] = [
    ("radian", "rad", [0, 0, 0, 0, 0, 0, 0], "m/m"),
    ("steradian", "sr", [0, 0, 0, 0, 0, 0, 0], "m²/m²"),
    ("hertz", "Hz", [0, 0, -1, 0, 0, 0, 0], ""),
    ("newton", "N", [1, 1, -2, 0, 0, 0, 0], ""),
    ("pascal", "Pa", [1, -1, -2, 0, 0, 0, 0], "N/m²"),
    ("joule", "J", [1, 2, -2, 0, 0, 0, 0], "N m"),
    ("watt", "W", [1, 2, -3, 0, 0, 0, 0], "J/s"),
    ("coulomb", "C", [0, 0, 1, 1, 0, 0, 0], ""),
    ("volt", "V", [1, 2, -3, -1, 0, 0, 0], "W/A"),
    ("farad", "F", [-1, -2, 4, 2, 0, 0, 0], "C/V"),
    ("ohm", "Ω", [1, 2, -3, -2, 0, 0, 0], "V/A"),
    ("siemens", "S", [-1, -2, 3, 2, 0, 0, 0], "A/V"),
    ("weber", "Wb", [1, 2, -2, -1, 0, 0, 0], "V s"),
    ("tesla", "T", [1, 0, -2, -1, 0, 0, 0], "Wb/m²"),
    ("henry", "H", [1, 2, -2, -2, 0, 0, 0], "Wb/A"),
    ("degree Celsius", "°C", [0, 0, 0, 0, 1, 0, 0], ""),
    ("lumen", "lm", [0, 0, 0, 0, 0, 0, 1], "cd sr"),
    ("lux", "lx", [0, -2, 0, 0, 0, 0, 1], "lm/m²"),
    ("becquerel", "Bq", [0, 0, -1, 0, 0, 0, 0], ""),
    ("gray", "Gy", [0, 2, -2, 0, 0, 0, 0], "J/kg"),
    ("sievert", "Sv", [0, 2, -2, 0, 0, 0, 0], "J/kg"),
    ("katal", "kat", [0, 0, -1, 0, 0, 1, 0], ""),
];

/// Table 8: name, symbol, value in SI units; the levels have no value there that a factor could give.
const ACCEPTED: [(&str, &str, &str, &str); 16] = [
    ("minute", "min", "60", "s"),
    ("hour", "h", "3600", "s"),
    ("day", "d", "86400", "s"),
    ("astronomical unit", "au", "149597870700", "m"),
    ("degree", "°", "π/180", "rad"),
    ("minute of arc", "′", "π/10800", "rad"),
    ("second of arc", "″", "π/648000", "rad"),
    ("hectare", "ha", "10000", "m²"),
    ("litre", "l", "1/1000", "m³"),
    ("litre", "L", "1/1000", "m³"),
    ("tonne", "t", "1000", "kg"),
    ("dalton", "Da", "1.66053906892e-27", "kg"),
    ("electronvolt", "eV", "1.602176634e-19", "J"),
    ("neper", "Np", "", "1"),
    ("bel", "B", "", "1"),
    ("decibel", "dB", "", "1"),
];

#[test]
fn prefixes_are_those_of_table_7() {
    assert_eq!(prefixes().len(), PREFIXES.len());
    for (name, symbol, exponent) in PREFIXES {
        let metre = unit(&format!("{symbol}m")).unwrap_or_else(|| panic!("{symbol}m is not known"));
        assert_eq!(metre.name(), format!("{name}metre"));
        let one = Exact::integer(10).pow(leastwise_quantities::Exponent::whole(exponent as i16));
        assert_eq!(Some(metre.factor()), one, "{name}");
    }
}

#[test]
fn base_units_are_those_of_table_2() {
    let table = [
        ("s", "second"),
        ("m", "metre"),
        ("kg", "kilogram"),
        ("A", "ampere"),
        ("K", "kelvin"),
        ("mol", "mole"),
        ("cd", "candela"),
    ];
    for (symbol, name) in table {
        let s = unit(symbol).unwrap_or_else(|| panic!("{symbol} is not known"));
        assert_eq!((s.name().as_str(), s.factor().is_one()), (name, true));
    }
    assert_eq!(units().iter().filter(|u| u.group == Group::Base).count(), 7);
}

#[test]
fn derived_units_are_those_of_table_4() {
    assert_eq!(units().iter().filter(|u| u.group == Group::Derived).count(), DERIVED.len());
    for (name, symbol, [kg, m, s, a, k, mol, cd], other) in DERIVED {
        let found = unit(symbol).unwrap_or_else(|| panic!("{symbol} is not known"));
        let expected = Dimension::whole([m, kg, s, a, k, mol, cd]);
        assert_eq!((found.name().as_str(), found.unit.dimension, found.factor().is_one()), (name, expected, true));
        if !other.is_empty() {
            let c = Compound::read(other).unwrap_or_else(|e| panic!("{other}: {e}"));
            assert_eq!((c.dimension(), c.factor().is_ok_and(Exact::is_one)), (expected, true), "{other}");
        }
        // All but the degree Celsius take prefixes here.
        assert_eq!(unit(&format!("m{symbol}")).is_some(), symbol != "°C", "{symbol}");
    }
}

#[test]
fn accepted_units_are_those_of_table_8() {
    for (name, symbol, value, of) in ACCEPTED {
        let one = Compound::read(symbol).unwrap_or_else(|e| panic!("{symbol}: {e}"));
        let other = Compound::read(of).unwrap_or_else(|e| panic!("{of}: {e}"));
        assert_eq!(one.dimension(), other.dimension(), "{symbol}");
        assert_eq!(one.factors()[0].0.name(), name);
        let ratio = one.factor().ok().zip(other.factor().ok()).and_then(|(a, b)| a.over(b));
        let shown = ratio.map(|r| r.decimal().filter(|d| d == value).unwrap_or_else(|| r.to_string()));
        assert_eq!(shown.unwrap_or_default(), value, "{symbol}");
    }
    // Litre and bel have two entries there.
    assert_eq!(units().iter().filter(|u| u.group == Group::Accepted).count(), ACCEPTED.len() - 2);
}
