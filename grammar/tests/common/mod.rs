//! What the tests share: formulas and items as one line, texts with marked places.
#![allow(dead_code)]

use leastwise_grammar::tree::*;
use leastwise_grammar::{CallableNames, ParsedItem, callable_names, parse_formula, parse_item, split};

/// A formula with all its parentheses, whatever the writer's.
pub fn shape(formula: &Formula) -> String {
    let list = |all: &[Formula]| all.iter().map(shape).collect::<Vec<_>>().join(", ");
    match &formula.kind {
        FormulaKind::Number(n) if n.exponent == 0 => n.digits.clone(),
        FormulaKind::Number(n) => format!("{}e{}", n.digits, n.exponent),
        FormulaKind::Name(name) => name.clone(),
        FormulaKind::Prime { base, order } => format!("{}{}", shape(base), "'".repeat(*order as usize)),
        FormulaKind::Index { base, indices } => format!("{}[{}]", shape(base), list(indices)),
        FormulaKind::Call { function, derivative, power, args, .. } => {
            let mark = match derivative {
                Derivative::None => String::new(),
                Derivative::Order(order) => "'".repeat(*order as usize),
                Derivative::Arguments(at) => format!("'{at:?}"),
            };
            let power = power.as_ref().map(|p| format!("^{}", shape(p))).unwrap_or_default();
            format!("{}{mark}{power}({})", function.text, list(args))
        }
        FormulaKind::Neg(a) => format!("(-{})", shape(a)),
        FormulaKind::Add(a, b) => format!("({} + {})", shape(a), shape(b)),
        FormulaKind::Sub(a, b) => format!("({} - {})", shape(a), shape(b)),
        FormulaKind::Mul { left, right, times } => {
            let sign = match times {
                Times::Juxtaposed => " ",
                Times::Star => " * ",
                Times::Dot => " · ",
                Times::Cross => " × ",
            };
            format!("({}{sign}{})", shape(left), shape(right))
        }
        FormulaKind::Div(a, b) => format!("({} / {})", shape(a), shape(b)),
        FormulaKind::Pow(a, b) => format!("({} ^ {})", shape(a), shape(b)),
        FormulaKind::Tuple(all) => format!("<{}>", list(all)),
        FormulaKind::Bars(a) => format!("|{}|", shape(a)),
        FormulaKind::Sum { index, range: None, body } => format!("sum({}: {})", index.text, shape(body)),
        FormulaKind::Sum { index, range: Some((a, b)), body } => {
            format!("sum({} in {}..{}: {})", index.text, shape(a), shape(b), shape(body))
        }
        FormulaKind::Paren(a) => shape(a),
        FormulaKind::Missing => "?".to_owned(),
    }
}

/// A unit: `N s m^-1`.
pub fn unit(unit: &UnitText) -> String {
    let factors = unit.factors.iter().map(|f| match f.exponent {
        (1, 1) => f.symbol.text.clone(),
        (n, 1) => format!("{}^{n}", f.symbol.text),
        (n, d) => format!("{}^({n}/{d})", f.symbol.text),
    });
    factors.collect::<Vec<_>>().join(" ")
}

/// A value: `42 {kg}`.
pub fn value(v: &Value) -> String {
    let unit = v.unit.as_ref().map(|u| format!(" {{{}}}", unit(u))).unwrap_or_default();
    format!("{}{unit}", shape(&v.number))
}

/// An item on one line, with all that was read.
pub fn item(kind: &ItemKind) -> String {
    let declared = |d: &Declared| match &d.index {
        Some(index) => format!("{}[{}]", d.name.text, index.text),
        None => d.name.text.clone(),
    };
    let names = |all: &[Declared]| all.iter().map(declared).collect::<Vec<_>>().join(", ");
    let formals = |all: &[Name]| {
        let all: Vec<&str> = all.iter().map(|n| n.text.as_str()).collect();
        if all.is_empty() { String::new() } else { format!("({})", all.join(", ")) }
    };
    let quantity = |q: &Option<UnitText>| q.as_ref().map(|q| format!(": {}", unit(q))).unwrap_or_default();
    let named = |name: &Option<Name>| name.as_ref().map(|n| format!("{} ", n.text)).unwrap_or_default();
    let comparison = |c: &Comparison| {
        c.rest.iter().fold(shape(&c.first), |all, (relation, next)| format!("{all} {relation:?} {}", shape(next)))
    };
    match kind {
        ItemKind::System { name, options } => {
            let options = options.iter().map(|o| match o {
                SystemOption::Dimensionless(_) => ", dimensionless".to_owned(),
                SystemOption::With(names) => {
                    format!(", with {}", names.iter().map(|n| n.text.as_str()).collect::<Vec<_>>().join(", "))
                }
            });
            format!("system {}{}", name.text, options.collect::<String>())
        }
        ItemKind::Coordinate { cyclic, declared, quantity: q } => {
            format!("coordinate{} {}{}", if *cyclic { " cyclic" } else { "" }, names(declared), quantity(q))
        }
        ItemKind::Parameter(all) => {
            let all = all.iter().map(|d| {
                let value = d.value.as_ref().map(|v| format!(" = {}", value(v))).unwrap_or_default();
                format!("{}{}{value}", declared(&d.declared), quantity(&d.quantity))
            });
            format!("parameter {}", all.collect::<Vec<_>>().join(", "))
        }
        ItemKind::Input { declared, quantity: q } => format!("input {}{}", names(declared), quantity(q)),
        ItemKind::Index { names, lower, upper } => {
            let names: Vec<&str> = names.iter().map(|n| n.text.as_str()).collect();
            format!("index {}: {}..{}", names.join(", "), shape(lower), shape(upper))
        }
        ItemKind::Let { declared: d, formals: f, body } => {
            format!("let {}{} = {}", declared(d), formals(f), shape(body))
        }
        ItemKind::Function { declared: d, formals: f, quantity: q } => {
            format!("function {}{}{}", declared(d), formals(f), quantity(q))
        }
        ItemKind::Assume(all) => format!("assume {}", all.iter().map(comparison).collect::<Vec<_>>().join(", ")),
        ItemKind::Term { kind, name, body } => format!("{kind:?} {}= {}", named(name), shape(body)),
        ItemKind::Dissipation { name, body } => format!("dissipation {}= {}", named(name), shape(body)),
        ItemKind::Force { name, on, body } => format!("force {}on {} = {}", named(name), shape(on), shape(body)),
        ItemKind::Constraint { declared: d, left, right } => {
            let name = d.as_ref().map(|d| format!("{}: ", declared(d))).unwrap_or_default();
            format!("constraint {name}{} = {}", shape(left), shape(right))
        }
        ItemKind::Symmetry { broken, name, arrows } => {
            let arrows = arrows.iter().map(|a| {
                let list = |all: &[Formula]| all.iter().map(shape).collect::<Vec<_>>().join("; ");
                format!("{} -> {}", list(&a.sources), list(&a.targets))
            });
            let arrows = arrows.collect::<Vec<_>>().join(", ");
            format!("symmetry{} {}{arrows}", if *broken { " broken" } else { "" }, named(name))
        }
        ItemKind::Conserved { name, body } => format!("conserved {}= {}", named(name), shape(body)),
        ItemKind::Run { name, from, over, until, with } => {
            let mut all = format!("run {}", named(name));
            for (what, v) in from {
                all += &format!("from {} = {}; ", shape(what), value(v));
            }
            all += &over.as_ref().map(|v| format!("over {}; ", value(v))).unwrap_or_default();
            all += &until.as_ref().map(|c| format!("until {}; ", comparison(c))).unwrap_or_default();
            for (what, f) in with {
                all += &format!("with {} = {}; ", shape(what), shape(f));
            }
            all.trim_end_matches("; ").to_owned()
        }
        ItemKind::Include { file, .. } => format!("include {file}"),
        ItemKind::Broken => "broken".to_owned(),
    }
}

/// The functions of the formula tests.
pub fn functions() -> CallableNames {
    CallableNames::new(["U", "V", "f", "u"].map(str::to_owned).to_vec())
}

/// Reads a formula that must be free of errors.
pub fn read(text: &str) -> Formula {
    let (formula, slips) = parse_formula(text, &functions());
    assert!(slips.iter().all(|s| s.severity != Severity::Error), "{text}: {slips:#?}");
    formula
}

/// All items of a text, read.
pub fn read_all(text: &str) -> Vec<(String, ParsedItem)> {
    let items = split(text);
    let callable = callable_names(items.iter());
    items.into_iter().map(|i| (i.text.clone(), parse_item(&i.text, &callable))).collect()
}

/// A text with the marks taken out, and the places between them: `⟦…⟧`.
pub fn marked(text: &str) -> (String, Vec<std::ops::Range<usize>>) {
    let (mut plain, mut places, mut starts) = (String::new(), Vec::new(), Vec::new());
    for c in text.chars() {
        match c {
            '⟦' => starts.push(plain.len()),
            '⟧' => places.push(starts.pop().expect("a mark was opened")..plain.len()),
            c => plain.push(c),
        }
    }
    places.sort_by_key(|p| (p.start, p.end));
    (plain, places)
}
