//! What stands at an offset: the name, word or formula under a cursor.

use crate::checked::{Contents, ItemRow, SymbolRow};
use leastwise_grammar::tree::*;
use leastwise_grammar::{Keyword, continues_name, fold_name, keywords};
use std::ops::Range;

/// What a cursor is on.
#[derive(Clone, Debug)]
pub struct Place<'c> {
    /// Its bytes in the file.
    pub range: Range<usize>,
    /// The item that holds it, counted in the file.
    pub item: usize,
    /// What it is.
    pub thing: Thing<'c>,
}

/// What can stand in a model.
#[derive(Clone, Debug)]
pub enum Thing<'c> {
    /// A declared name, also one that an included file declares, or one taken for a parameter.
    Symbol(&'c SymbolRow),
    /// A name bound in the item itself: a formal argument, the index of a sum or family.
    Bound(Bound),
    /// The name of a term of the Lagrangian, or its keyword: its number in `terms`.
    Term(usize),
    /// The name of a force or dissipation, or its keyword: its number in `forces`.
    Force(usize),
    /// The name of a constraint, or its keyword: its number in `constraints`.
    Constraint(usize),
    /// The name of a symmetry claim, or its keyword: its number in `symmetries`.
    Symmetry(usize),
    /// The name of a claimed constant, or its keyword: its number in `conserved`.
    Conserved(usize),
    /// The name of a run, or its keyword: its number in `runs`.
    Run(usize),
    /// The system's name, or its keyword.
    System,
    /// The file that an `include` names.
    Include,
    /// A quantity or the symbol of a unit, folded.
    Unit(String),
    /// A keyword, function or constant of the language.
    Word(&'static Keyword),
    /// The name of an item that has no meaning, because something in it is wrong.
    Broken,
}

/// A name bound in its item.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Bound {
    /// The folded name.
    pub name: String,
    /// What binds it.
    pub kind: Binder,
    /// Where it is bound: bytes in the file; of ε nowhere.
    pub declared: Option<Range<usize>>,
    /// All its places, the binding one included, in the order of the file.
    pub places: Vec<Range<usize>>,
}

/// What binds a name in its item.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Binder {
    /// The head of a function or definition, or of a `with` in a run.
    Formal,
    /// A sum, over a range of its own.
    Sum,
    /// The head of a family's definition or constraint: the index is declared elsewhere.
    Member,
    /// A transformation: ε.
    Transformation,
}

/// The item that holds an offset, or ends right before it.
pub fn item_at(checked: &Contents, offset: usize) -> Option<usize> {
    let after = checked.items.partition_point(|i| i.range.start <= offset);
    let at = after.checked_sub(1)?;
    (offset <= checked.items[at].range.end).then_some(at)
}

/// What stands at an offset. A cursor right behind a word is on it, unless the next word begins there.
pub fn place_at(checked: &Contents, offset: usize) -> Option<Place<'_>> {
    let (range, text) = word_at(&checked.text, offset).or_else(|| sign_at(&checked.text, offset))?;
    let item = item_at(checked, range.start)?;
    let row = &checked.items[item];
    let local = Span::new(range.start - row.range.start, range.end - row.range.start);
    let place = |thing| Some(Place { range: range.clone(), item, thing });
    if within_comment(&row_text(checked, row)[..local.start as usize]) {
        return None;
    }
    let keyword = row.parsed.item.keyword;
    if keyword.start <= local.start && local.end <= keyword.end || is_head_name(&row.parsed.item.kind, local) {
        // `cyclic` explains itself; the item's own keyword stands for the item.
        let claims = if keyword.start <= local.start && local.end <= keyword.end {
            keywords().iter().find(|k| k.name == text && k.role == leastwise_grammar::KeywordRole::Modifier)
        } else {
            None
        };
        if let Some(word) = claims {
            return place(Thing::Word(word));
        }
        if let Some(thing) = head(checked, item) {
            return place(thing);
        }
    }
    if let Some(bound) = bound_at(row, local) {
        return place(Thing::Bound(bound));
    }
    if let Some(symbol) = symbol_at(checked, &range) {
        return place(Thing::Symbol(symbol));
    }
    if let ItemKind::Include { span, .. } = &row.parsed.item.kind
        && span.start <= local.start
        && local.end <= span.end
    {
        return Some(Place {
            range: row.range.start + span.start as usize..row.range.start + span.end as usize,
            item,
            thing: Thing::Include,
        });
    }
    if let Some(unit) = unit_at(&row.parsed.item.kind, local) {
        return place(Thing::Unit(unit));
    }
    let folded = fold_name(text);
    if let Some(word) = keywords().iter().find(|k| k.name == folded) {
        return place(Thing::Word(word));
    }
    is_head_name(&row.parsed.item.kind, local).then(|| place(Thing::Broken)).flatten()
}

/// The word that holds the offset or ends at it.
pub fn word_at(text: &str, offset: usize) -> Option<(Range<usize>, &str)> {
    let offset = text.floor_char_boundary(offset);
    let end = offset + text[offset..].find(|c| !continues_name(c)).unwrap_or(text.len() - offset);
    let start = text[..offset]
        .rfind(|c| !continues_name(c))
        .map_or(0, |at| at + text[at..].chars().next().map_or(1, char::len_utf8));
    // A word does not begin with a digit or mark: `2x` is two and x.
    let begins = text[start..end].find(leastwise_grammar::begins_name)? + start;
    (begins <= offset && begins < end).then(|| (begins..end, &text[begins..end]))
}

/// A sign that stands for a function or is part of a unit: `√`, `°`.
fn sign_at(text: &str, offset: usize) -> Option<(Range<usize>, &str)> {
    let offset = text.floor_char_boundary(offset);
    let c = text[offset..].chars().next().filter(|c| matches!(c, '√' | '°' | '"' | '′' | '″'));
    let quoted = || {
        // Anywhere between quotes is the file's name.
        let line = text[..offset].rfind(['\n', '\r']).map_or(0, |at| at + 1);
        let open = text[line..offset].find('"')? + line;
        let close = text[open + 1..].find(['"', '\n', '\r'])? + open + 1;
        (offset <= close).then(|| (open..close, &text[open..close]))
    };
    match c {
        Some('"') | None => quoted(),
        Some(c) => Some((offset..offset + c.len_utf8(), &text[offset..offset + c.len_utf8()])),
    }
}

fn row_text<'c>(checked: &'c Contents, row: &ItemRow) -> &'c str {
    &checked.text[row.range.clone()]
}

/// Whether the text before ends in a comment.
pub(crate) fn within_comment(before: &str) -> bool {
    let line = before.rfind(['\n', '\r']).map_or(0, |at| at + 1);
    let mut quoted = false;
    before[line..].chars().any(|c| {
        quoted ^= c == '"';
        c == '#' && !quoted
    })
}

/// The name in an item's head that names the item itself, not a symbol.
pub(crate) fn head_name(kind: &ItemKind) -> Option<&Name> {
    match kind {
        ItemKind::System { name, .. } => Some(name),
        ItemKind::Term { name, .. }
        | ItemKind::Dissipation { name, .. }
        | ItemKind::Force { name, .. }
        | ItemKind::Symmetry { name, .. }
        | ItemKind::Conserved { name, .. }
        | ItemKind::Run { name, .. } => name.as_ref(),
        ItemKind::Constraint { declared, .. } => declared.as_ref().map(|d| &d.name),
        _ => None,
    }
}

fn is_head_name(kind: &ItemKind, span: Span) -> bool {
    head_name(kind).is_some_and(|n| n.span.start <= span.start && span.end <= n.span.end)
}

/// What an item with a meaning of its own is in the model.
pub(crate) fn head(checked: &Contents, item: usize) -> Option<Thing<'static>> {
    let row = &checked.items[item];
    let start = row.range.start;
    let number = |mut starts: Box<dyn Iterator<Item = usize> + '_>| starts.position(|s| s == start);
    let all = |list: Vec<usize>| number(Box::new(list.into_iter()));
    Some(match &row.parsed.item.kind {
        ItemKind::System { .. } => Thing::System,
        ItemKind::Term { .. } => Thing::Term(all(checked.terms.iter().map(|t| t.range.start).collect())?),
        ItemKind::Dissipation { .. } | ItemKind::Force { .. } => {
            Thing::Force(all(checked.forces.iter().map(|t| t.range.start).collect())?)
        }
        ItemKind::Constraint { .. } => Thing::Constraint(all(checked.constraints.iter().map(|r| r.start).collect())?),
        ItemKind::Symmetry { .. } => Thing::Symmetry(all(checked.symmetries.iter().map(|s| s.range.start).collect())?),
        ItemKind::Conserved { .. } => Thing::Conserved(all(checked.conserved.iter().map(|s| s.range.start).collect())?),
        ItemKind::Run { .. } => Thing::Run(all(checked.runs.iter().map(|s| s.range.start).collect())?),
        _ => return None,
    })
}

/// The symbol that is declared or used in exactly this range.
pub fn symbol_at<'c>(checked: &'c Contents, range: &Range<usize>) -> Option<&'c SymbolRow> {
    let holds = |r: &Range<usize>| r.start <= range.start && range.end <= r.end;
    checked.symbols.iter().find(|s| s.range.as_ref().is_some_and(holds) || s.uses.iter().any(holds))
}

/// The quantity or unit symbol at a place.
fn unit_at(kind: &ItemKind, span: Span) -> Option<String> {
    let holds = |f: &&UnitFactor| f.symbol.span.start <= span.start && span.end <= f.symbol.span.end;
    unit_factors(kind).into_iter().find(holds).map(|f| f.symbol.text.clone())
}

/// The factors of all units and quantities in an item.
pub fn unit_factors(kind: &ItemKind) -> Vec<&UnitFactor> {
    let mut units: Vec<&UnitText> = Vec::new();
    match kind {
        ItemKind::Coordinate { quantity, .. }
        | ItemKind::Input { quantity, .. }
        | ItemKind::Function { quantity, .. } => units.extend(quantity),
        ItemKind::Parameter(list) => {
            for d in list {
                units.extend(&d.quantity);
                units.extend(d.value.as_ref().and_then(|v| v.unit.as_ref()));
            }
        }
        ItemKind::Run { from, over, .. } => {
            units.extend(from.iter().filter_map(|(_, v)| v.unit.as_ref()));
            units.extend(over.as_ref().and_then(|v| v.unit.as_ref()));
        }
        _ => {}
    }
    units.into_iter().flat_map(|u| &u.factors).collect()
}

/// All formulas of an item, outermost ones only, in the order of the text.
pub fn formulas(kind: &ItemKind) -> Vec<&Formula> {
    match kind {
        ItemKind::System { .. }
        | ItemKind::Coordinate { .. }
        | ItemKind::Input { .. }
        | ItemKind::Function { .. }
        | ItemKind::Include { .. }
        | ItemKind::Broken => Vec::new(),
        ItemKind::Parameter(list) => list.iter().filter_map(|d| d.value.as_ref()).map(|v| &v.number).collect(),
        ItemKind::Index { lower, upper, .. } => vec![lower, upper],
        ItemKind::Let { body, .. }
        | ItemKind::Term { body, .. }
        | ItemKind::Dissipation { body, .. }
        | ItemKind::Conserved { body, .. } => vec![body],
        ItemKind::Force { on, body, .. } => vec![on, body],
        ItemKind::Constraint { left, right, .. } => vec![left, right],
        ItemKind::Assume(list) => {
            list.iter().flat_map(|c| std::iter::once(&c.first).chain(c.rest.iter().map(|r| &r.1))).collect()
        }
        ItemKind::Symmetry { arrows, .. } => arrows.iter().flat_map(|a| a.sources.iter().chain(&a.targets)).collect(),
        ItemKind::Run { from, over, until, with, .. } => {
            let mut out: Vec<&Formula> = Vec::new();
            from.iter().for_each(|(what, v)| out.extend([what, &v.number]));
            out.extend(over.iter().map(|v| &v.number));
            out.extend(until.iter().flat_map(|c| std::iter::once(&c.first).chain(c.rest.iter().map(|r| &r.1))));
            with.iter().for_each(|(what, formula)| out.extend([what, formula]));
            out
        }
    }
}

/// The formulas around an offset of the item, innermost first.
pub fn formulas_at(kind: &ItemKind, offset: usize) -> Vec<&Formula> {
    let holds = |f: &&Formula| f.span.range().start <= offset && offset <= f.span.range().end;
    let mut path = Vec::new();
    let mut next = formulas(kind).into_iter().find(holds);
    while let Some(f) = next {
        path.push(f);
        next = f.parts().into_iter().find(holds);
    }
    path.reverse();
    path
}

/// The name bound in the item that stands at a place.
fn bound_at(row: &ItemRow, span: Span) -> Option<Bound> {
    let mut list = Vec::new();
    binders(&row.parsed.item.kind, row.range.start, &mut list);
    // Innermost scopes come last.
    list.into_iter().rev().find(|b| {
        b.places
            .iter()
            .any(|p| p.start <= row.range.start + span.start as usize && row.range.start + span.end as usize <= p.end)
    })
}

/// Every name that an item binds, outer scopes first.
pub fn binders(kind: &ItemKind, start: usize, out: &mut Vec<Bound>) {
    let mut scopes = Scopes { start, open: Vec::new(), out };
    match kind {
        ItemKind::Let { declared, formals, body } => {
            for f in formals {
                scopes.open(&f.text, Binder::Formal, Some(f.span));
            }
            if let Some(index) = &declared.index {
                scopes.open(&index.text, Binder::Member, Some(index.span));
            }
            scopes.formula(body);
        }
        ItemKind::Function { formals, .. } => {
            for f in formals {
                scopes.open(&f.text, Binder::Formal, Some(f.span));
            }
        }
        ItemKind::Constraint { declared, left, right } => {
            if let Some(index) = declared.as_ref().and_then(|d| d.index.as_ref()) {
                scopes.open(&index.text, Binder::Member, Some(index.span));
            }
            scopes.formula(left);
            scopes.formula(right);
        }
        ItemKind::Symmetry { arrows, .. } => {
            scopes.open("ε", Binder::Transformation, None);
            for f in arrows.iter().flat_map(|a| a.sources.iter().chain(&a.targets)) {
                scopes.formula(f);
            }
        }
        ItemKind::Run { with, .. } => {
            for (what, formula) in with {
                let depth = scopes.open.len();
                if let FormulaKind::Call { args, .. } = &what.kind {
                    for a in args {
                        if let Some(name) = crate::uses::plain_name(a) {
                            scopes.open(name, Binder::Formal, Some(a.span));
                        }
                    }
                }
                scopes.formula(formula);
                scopes.close(depth);
            }
        }
        _ => formulas(kind).into_iter().for_each(|f| scopes.formula(f)),
    }
    scopes.close(0);
}

struct Scopes<'o> {
    start: usize,
    /// Numbers in `out`, innermost last.
    open: Vec<usize>,
    out: &'o mut Vec<Bound>,
}

impl Scopes<'_> {
    fn range(&self, span: Span) -> Range<usize> {
        self.start + span.start as usize..self.start + span.end as usize
    }

    fn open(&mut self, name: &str, kind: Binder, declared: Option<Span>) {
        let declared = declared.map(|s| self.range(s));
        self.open.push(self.out.len());
        self.out.push(Bound { name: name.to_owned(), kind, places: declared.iter().cloned().collect(), declared });
    }

    fn close(&mut self, depth: usize) {
        self.open.truncate(depth);
    }

    fn formula(&mut self, f: &Formula) {
        match &f.kind {
            FormulaKind::Name(name) => {
                if let Some(&at) = self.open.iter().rev().find(|&&b| self.out[b].name == *name) {
                    let range = self.range(f.span);
                    self.out[at].places.push(range);
                }
            }
            FormulaKind::Sum { index, range, body } => {
                for bound in range.iter().flat_map(|(a, b)| [a, b]) {
                    self.formula(bound);
                }
                let depth = self.open.len();
                // Without a range it is a declared index, bound once more.
                let kind = if range.is_some() { Binder::Sum } else { Binder::Member };
                self.open(&index.text, kind, Some(index.span));
                self.formula(body);
                self.close(depth);
            }
            _ => f.parts().into_iter().for_each(|p| self.formula(p)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::database::Session;
    use crate::include::NoFiles;

    /// What stands at `$0`, in words.
    #[track_caller]
    fn check(fixture: &str, expected: &str) {
        let offset = fixture.find("$0").expect("a cursor");
        let text = fixture.replace("$0", "");
        let checked = Session::new().check("swing.least", &text, &NoFiles);
        let found = place_at(&checked, offset).map(|p| {
            let shown = &text[p.range.clone()];
            match p.thing {
                Thing::Symbol(s) => format!("`{shown}` is {}", s.kind.described()),
                Thing::Bound(b) => format!("`{shown}` is bound: {:?}, {} places", b.kind, b.places.len()),
                Thing::Term(k) => format!("`{shown}` is term {k}"),
                Thing::Word(w) => format!("`{shown}` is the word {}", w.name),
                Thing::Unit(u) => format!("`{shown}` is the unit {u}"),
                other => format!("`{shown}` is {other:?}"),
            }
        });
        assert_eq!(found.as_deref().unwrap_or("nothing"), expected);
    }

    const MODEL: &str = "\
system swing
coordinate θ: angle
parameter m: mass = 2 kg, l: length = 1 m, g = 9.81 m/s^2
index i: 1..3
parameter k[i]
let f(x) = x^2 + sum(j in 1..3: k[j] x)
kinetic   bob    = 1/2 m l² θ'^2
potential weight = -m g l cos θ + f(θ)  # the weight of m
symmetry turn: θ -> θ + ε
conserved h = energy
";

    #[track_caller]
    fn at(line: &str, expected: &str) {
        let plain = line.replace("$0", "");
        assert!(MODEL.contains(&plain), "{plain}");
        check(&MODEL.replace(&plain, line), expected);
    }

    #[test]
    fn names_where_they_are_declared_and_used() {
        at("coordinate $0θ", "`θ` is a coordinate");
        at("coordinate θ$0:", "`θ` is a coordinate");
        at("l² $0θ'^2", "`θ` is a coordinate");
        at("l² θ$0'^2", "`θ` is a coordinate");
        at("1/2 m$0 l²", "`m` is a parameter");
        at("1/2 m $0l²", "`l` is a parameter");
        at("+ $0f(θ)", "`f` is a definition");
    }

    #[test]
    fn names_bound_in_an_item() {
        at("f($0x) =", "`x` is bound: Formal, 3 places");
        at("k[$0j] x", "`j` is bound: Sum, 2 places");
        at("θ + $0ε", "`ε` is bound: Transformation, 1 places");
    }

    #[test]
    fn heads_of_items() {
        at("kin$0etic   bob", "`kinetic` is term 0");
        at("potential w$0eight", "`weight` is term 1");
        at("sys$0tem", "`system` is System");
        at("symmetry t$0urn", "`turn` is Symmetry(0)");
    }

    #[test]
    fn words_units_and_nothing() {
        at("c$0os θ", "`cos` is the word cos");
        at("= ener$0gy", "`energy` is the word energy");
        at(": ma$0ss", "`mass` is the unit mass");
        at("2 k$0g", "`kg` is the unit kg");
        at("# the weight of $0m", "nothing");
        at("l cos θ +$0 f", "nothing");
        at("conserved$0 h", "`conserved` is Conserved(0)");
        check("coordinate 𝑥̇$0\nkinetic 1/2 𝑥'^2", "`𝑥̇` is a coordinate");
    }

    #[test]
    fn a_file_is_a_place() {
        check("include \"si$0te.least\"\n", "`\"site.least\"` is Include");
    }
}
