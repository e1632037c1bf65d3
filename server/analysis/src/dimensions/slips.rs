//! Planted slips: in each model one exponent is changed or one factor dropped, and the finding must lie there.

use crate::checked::Checked;
use crate::codes;
use crate::database::Session;
use crate::models::{Disk, models};
use leastwise_grammar::tree::*;
use std::ops::Range;
use std::path::{Path, PathBuf};

/// An edit with the range, in the edited text, of the product that it is in.
struct Slip {
    edit: (Range<usize>, String),
    product: Range<usize>,
}

/// The slips of an item: each changes a dimension.
fn slips(checked: &Checked, item: &crate::checked::ItemRow) -> Vec<Slip> {
    let mut out = Vec::new();
    let mut todo: Vec<(&Formula, Span)> = match &item.parsed.item.kind {
        ItemKind::Term { body, .. } | ItemKind::Dissipation { body, .. } | ItemKind::Force { body, .. } => {
            vec![(body, body.span)]
        }
        ItemKind::Let { body, .. } => vec![(body, body.span)],
        ItemKind::Constraint { left, right, .. } => vec![(left, left.span), (right, right.span)],
        _ => Vec::new(),
    };
    let has_size = |f: &Formula| match &f.kind {
        FormulaKind::Name(name) => sized(checked, name),
        FormulaKind::Prime { .. } => true,
        FormulaKind::Index { base, .. } => matches!(&base.kind, FormulaKind::Name(n) if sized(checked, n)),
        _ => false,
    };
    let at = |s: Span| item.range.start + s.start as usize..item.range.start + s.end as usize;
    while let Some((f, product)) = todo.pop() {
        match &f.kind {
            FormulaKind::Pow(base, exponent) if has_size(base) => {
                if let FormulaKind::Number(n) = &exponent.kind
                    && n.exponent == 0
                {
                    let raised = checked.text[at(exponent.span)].starts_with(|c: char| c.is_ascii_digit());
                    let text = match (n.digits.as_str(), raised) {
                        ("2", true) => "3",
                        ("2", false) => "³",
                        (_, true) => "2",
                        (_, false) => "²",
                    };
                    out.push(Slip { edit: (at(exponent.span), text.to_owned()), product: at(product) });
                }
            }
            FormulaKind::Mul { left, right, times } if *times == Times::Juxtaposed => {
                for side in [left, right] {
                    if has_size(side) || matches!(&side.kind, FormulaKind::Pow(b, _) if has_size(b)) {
                        out.push(Slip { edit: (at(side.span), "1".to_owned()), product: at(product) });
                    }
                }
            }
            _ => {}
        }
        for part in f.parts() {
            let sum = matches!(f.kind, FormulaKind::Add(..) | FormulaKind::Sub(..));
            let own = sum || matches!(f.kind, FormulaKind::Call { .. });
            if !matches!(f.kind, FormulaKind::Prime { .. } | FormulaKind::Index { .. }) {
                todo.push((part, if own { part.span } else { product }));
            }
        }
    }
    out
}

/// Whether a name has a dimension that is declared and is not that of a number.
fn sized(checked: &Checked, name: &str) -> bool {
    checked.dimensions.as_ref().and_then(|d| d.of_name(name)).is_some_and(|d| !d.is_one())
}

fn folder(path: &str) -> Vec<PathBuf> {
    models(&Path::new(env!("CARGO_MANIFEST_DIR")).join(path))
}

#[test]
#[allow(clippy::print_stdout)]
fn planted_slips_are_found_at_their_place() {
    let (mut planted, mut found, mut placed) = (0, 0, 0);
    let mut paths = folder("../../grammar/examples");
    paths.extend(folder("../../tests/oracle/models"));
    if let Some(shared) = std::env::var_os("LEASTWISE_SHARED") {
        paths.extend(folder(&Path::new(&shared).join("cases").to_string_lossy()));
    }
    let mut session = Session::new();
    for path in &paths {
        let text = std::fs::read_to_string(path).unwrap();
        let name = path.to_string_lossy();
        let checked = session.check(&name, &text, &Disk);
        let of = |checked: &Checked| -> Vec<Range<usize>> {
            checked.findings.iter().filter(|f| f.code == codes::UNLIKE_QUANTITIES).map(|f| f.range.clone()).collect()
        };
        // A model in which a mass is one.
        let unit_mass = name.ends_with("coupled_pair.least");
        assert_eq!(of(&checked).len(), usize::from(unit_mass), "{name}");
        if unit_mass {
            continue;
        }
        if checked.dimensions.is_none() {
            continue;
        }
        for item in &checked.items {
            for slip in slips(&checked, item) {
                let (range, new) = &slip.edit;
                let edited = format!("{}{new}{}", &text[..range.start], &text[range.end..]);
                let again = session.check(&name, &edited, &Disk);
                if !crate::fixture::errors(&again).is_empty() {
                    continue;
                }
                let ranges = of(&again);
                let end = slip.product.end + new.len() - range.len().min(slip.product.end);
                let there = |r: &Range<usize>| slip.product.start <= r.start && r.end <= end.max(r.start);
                planted += 1;
                found += usize::from(!ranges.is_empty());
                let right = ranges.len() == 1 && there(&ranges[0]);
                placed += usize::from(right);
                if !right {
                    let line = &edited[..range.start].matches('\n').count() + 1;
                    let row = edited.lines().nth(line - 1).unwrap_or_default();
                    println!(
                        "{}:{line}: {row} → {:?}",
                        path.file_stem().unwrap().to_string_lossy(),
                        ranges.iter().map(|r| &edited[r.clone()]).collect::<Vec<_>>()
                    );
                }
            }
        }
    }
    println!("{planted} slips planted, {found} found, {placed} at their place alone");
    assert!(planted > 100);
    assert!(placed * 100 >= planted * 95);
}
