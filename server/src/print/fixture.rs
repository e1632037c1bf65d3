//! A file and a sheet made by hand, for the tests of printing: a winch without its swing.

use crate::print::Outcome;
use leastwise_analysis::report::*;
use leastwise_analysis::search::{SearchReport, SearchRow};
use leastwise_grammar::tree::Severity;

/// A formula from its three spellings.
pub fn formula(text: &str, plain: &str, latex: &str) -> Formula {
    Formula { text: text.into(), plain: plain.into(), latex: latex.into(), measured: None }
}

fn alike(text: &str) -> Formula {
    formula(text, text, text)
}

/// A file with one finding.
pub fn outcome() -> Outcome {
    let text = "cyclic coordinate φ\npotential weight = 𝑚 g φ\n".to_string();
    let place = text.rfind('φ').unwrap_or(0);
    let finding = Finding {
        code: "cyclic-claim",
        severity: Severity::Warning,
        message: "`weight` depends on φ".into(),
        help: Some("leave `cyclic` out".into()),
        range: place..place + "φ".len(),
        related: vec![Related { range: 0.."cyclic coordinate φ".len(), message: "claimed here".into() }],
        fixes: vec![Fix { title: "delete `cyclic`".into(), edits: vec![(0.."cyclic ".len(), String::new())] }],
    };
    Outcome { path: "shaft.least".into(), text, findings: vec![finding], unreadable: None }
}

/// A sheet with a bit of everything.
pub fn sheet() -> Sheet {
    let zero = || alike("0");
    let momentum = formula("(m + J/a²) r'", "(m + J/a^2)*r'", "\\left(m + \\frac{J}{a^{2}}\\right) \\, \\dot{r}");
    let pull = formula(
        "m r φ'² - m g - c r' - F0 tanh(r'/v0)",
        "m*r*φ'^2 - m*g - c*r' - F0*tanh(r'/v0)",
        "m \\, r \\, \\dot{\\varphi}^{2} - m \\, g - c \\, \\dot{r} - F_{0} \\, \\tanh \\left(\\frac{\\dot{r}}{v_{0}}\\right)",
    );
    let spin = formula("m r² φ'", "m*r^2*φ'", "m \\, r^{2} \\, \\dot{\\varphi}");
    let kinetic = formula(
        "1/2 m (r'² + r² φ'²)",
        "1/2*m*(r'^2 + r^2*φ'^2)",
        "\\frac{1}{2} \\, m \\, \\left(\\dot{r}^{2} + r^{2} \\, \\dot{\\varphi}^{2}\\right)",
    );
    let weight = alike("m g r");
    let lagrangian = formula(
        "1/2 m (r'² + r² φ'²) + J r'²/(2 a²) - m g r",
        "1/2*m*(r'^2 + r^2*φ'^2) + J*r'^2/(2*a^2) - m*g*r",
        "\\frac{1}{2} \\, m \\, \\left(\\dot{r}^{2} + r^{2} \\, \\dot{\\varphi}^{2}\\right) + \\frac{J \\, \\dot{r}^{2}}{2 a^{2}} - m \\, g \\, r",
    );
    let energy = formula("1/2 m (r'² + r² φ'²) + J r'²/(2 a²) + m g r", "h", "h");
    let row = |name: &str, cyclic, momentum: &Formula, force: Formula, equation: Formula| CoordinateRow {
        name: name.into(),
        members: None,
        quantity: Some(if cyclic { "angle" } else { "length" }.into()),
        cyclic,
        cyclic_undecided: None,
        momentum_conserved: cyclic,
        momentum: momentum.clone(),
        force,
        equation,
        reaction: None,
        by_term: Vec::new(),
    };
    let symmetry = |name: &str, status, q: &str, charge: &Formula, rate: Formula| SymmetryRow {
        name: name.into(),
        expected_broken: status == Status::Broken,
        status,
        undecided: None,
        generator: vec![("t".into(), zero()), (q.into(), alike("1"))],
        charge: charge.clone(),
        gauge: None,
        gauge_unknown: None,
        conserved: if rate == zero() { Answer::Yes } else { Answer::No(None) },
        rate,
        broken_by: Vec::new(),
        smallest: true,
        taken_by: Vec::new(),
        respects_constraints: None,
        range: 0..7,
    };
    let mut drop = symmetry("drop", Status::Broken, "r", &momentum, pull.clone());
    drop.broken_by = vec![
        BreakerRow {
            term: "package".into(),
            variation: formula("m r φ'²", "m*r*φ'^2", "m \\, r \\, \\dot{\\varphi}^{2}"),
        },
        BreakerRow { term: "weight".into(), variation: alike("-m g") },
    ];
    drop.taken_by = vec!["bearing".into(), "brake".into()];
    Sheet {
        system: "shaft_winch".into(),
        description: Some("instrument package lowered down a survey shaft".into()),
        lagrangian,
        terms: vec![
            TermRow { name: "package".into(), kind: "kinetic", formula: kinetic },
            TermRow {
                name: "drum".into(),
                kind: "kinetic",
                formula: formula("J r'²/(2 a²)", "J*r'^2/(2*a^2)", "\\frac{J \\, \\dot{r}^{2}}{2 a^{2}}"),
            },
            TermRow { name: "weight".into(), kind: "potential", formula: weight },
        ],
        coordinates: vec![
            row(
                "r",
                false,
                &momentum,
                formula("m r φ'² - m g", "m*r*φ'^2 - m*g", "m \\, r \\, \\dot{\\varphi}^{2} - m \\, g"),
                formula(
                    "(m + J/a²) r'' - m r φ'² + m g + c r' + F0 tanh(r'/v0)",
                    "r",
                    "\\left(m + \\frac{J}{a^{2}}\\right) \\, \\ddot{r} - m \\, r \\, \\dot{\\varphi}^{2} + m \\, g + c \\, \\dot{r} + F_{0} \\, \\tanh \\left(\\frac{\\dot{r}}{v_{0}}\\right)",
                ),
            ),
            row(
                "φ",
                true,
                &spin,
                zero(),
                formula(
                    "m r² φ'' + 2 m r r' φ'",
                    "m*r^2*φ'' + 2*m*r*r'*φ'",
                    "m \\, r^{2} \\, \\ddot{\\varphi} + 2 m \\, r \\, \\dot{r} \\, \\dot{\\varphi}",
                ),
            ),
        ],
        mass_matrix: vec![
            vec![formula("m + J/a²", "m + J/a^2", "m + \\frac{J}{a^{2}}"), zero()],
            vec![zero(), formula("m r²", "m*r^2", "m \\, r^{2}")],
        ],
        mass_entries: Vec::new(),
        energy: EnergyRow {
            formula: energy,
            conserved: Answer::No(None),
            rate: formula(
                "-c r'² - F0 r' tanh(r'/v0)",
                "-c*r'^2 - F0*r'*tanh(r'/v0)",
                "-c \\, \\dot{r}^{2} - F_{0} \\, \\dot{r} \\, \\tanh \\left(\\frac{\\dot{r}}{v_{0}}\\right)",
            ),
            is_total_energy: true,
        },
        symmetries: vec![symmetry("azimuth", Status::Exact, "φ", &spin, zero()), drop],
        conserved: vec![ConservedRow {
            name: "spin".into(),
            formula: spin,
            holds: Answer::Yes,
            rate: zero(),
            origin: "from the symmetry φ → φ + ε".into(),
            range: 0..7,
        }],
        found: None,
        insights: Default::default(),
    }
}

/// A search that found the energy, which is known, and a boost.
pub fn found() -> SearchReport {
    let boost = SearchRow {
        name: "boost_x".into(),
        title: "charge of boost_x".into(),
        known: false,
        generator: vec![("t".into(), alike("0")), ("x".into(), alike("t"))],
        gauge: Some(formula("m x", "m*x", "m \\, x")),
        charge: formula("m (t x' - x)", "m*(t*x' - x)", "m \\, \\left(t \\, \\dot{x} - x\\right)"),
        source: Some("symmetry boost_x: x -> x + ε t".into()),
    };
    let delay = SearchRow {
        name: "delay".into(),
        title: "energy".into(),
        known: true,
        generator: vec![("t".into(), alike("1"))],
        gauge: None,
        charge: formula("-1/2 m x'²", "-1/2*m*x'^2", "-\\frac{1}{2} \\, m \\, \\dot{x}^{2}"),
        source: Some("symmetry delay: t -> t + ε".into()),
    };
    SearchReport { degree: 2, items: vec![delay, boost], incomplete: None }
}
