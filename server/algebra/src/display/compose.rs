//! From an expression to the tree on the page: order, signs, fractions. Nothing is simplified here.

use crate::arena::{Arena, Expr, Node, Symbol};
use crate::display::DisplayOptions;
use crate::display::form::{Form, Member, Name, Summand, coefficient_cost};
use crate::display::order::{Keys, TermKey, class};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;
use std::sync::Arc;

/// Builds trees. Keys and letters are kept between expressions of one print.
pub(crate) struct Composer<'a> {
    arena: &'a Arena,
    keys: &'a mut Keys,
    /// The letters for bound indices, the outermost first.
    indices: Vec<Arc<str>>,
    /// The indices of the sums around, outermost first.
    active: Vec<Symbol>,
    /// What is written as a letter of its own.
    pub abbreviations: HashMap<Expr, usize>,
}

/// A summand on its way into a sum.
struct Piece {
    core: Expr,
    coefficient: Rational,
    key: TermKey,
}

/// A summand laid out, with what decides its place.
#[derive(Clone)]
struct Part {
    summand: Summand,
    key: TermKey,
    /// The number in front of it.
    size: Rational,
}

/// Where a product has a sum that may take the sign, as in [`Summand::free`].
type Free = Option<(bool, usize)>;

/// A sum laid out.
enum Parts {
    /// One product, with its sign.
    Whole(bool, Form),
    /// Two summands or more.
    Sum(Vec<Part>),
}

impl<'a> Composer<'a> {
    pub fn new(arena: &'a Arena, keys: &'a mut Keys, root: &[Expr], options: &DisplayOptions) -> Composer<'a> {
        let indices = letters(arena, root, options);
        Composer { arena, keys, indices, active: Vec::new(), abbreviations: HashMap::new() }
    }

    /// The tree of an expression, with its sign.
    pub fn compose(&mut self, e: Expr) -> Form {
        let (negative, mut form) = self.signed(e);
        let negative = negative && !turn(&mut form);
        form.signed(negative)
    }

    /// Sign and tree.
    fn signed(&mut self, e: Expr) -> (bool, Form) {
        if let Some(k) = self.abbreviations.get(&e) {
            return (false, Form::Abbreviation(*k));
        }
        match self.arena.node(e) {
            Node::Number(r) => (r.is_negative(), Form::Number(r.abs())),
            Node::Sum(c, terms) if c.is_zero() && terms.len() == 1 => {
                let (core, c) = terms[0].clone();
                let (negative, form, _) = self.product(core, &c);
                (negative, form)
            }
            Node::Sum(c, terms) => {
                let (c, terms) = (c.clone(), terms.clone());
                let form = self.sum(&c, &terms, &Rational::ONE);
                match form {
                    Form::Sum(list) if list.iter().all(|s| s.negative) => (true, Form::Sum(list).signed(true)),
                    form => form.unsigned(),
                }
            }
            Node::Product(_) => {
                let (negative, form, _) = self.product(e, &Rational::ONE);
                (negative, form)
            }
            _ => {
                let e = (e, Rational::ONE);
                self.power(e.0, &e.1)
            }
        }
    }

    fn pieces(&mut self, constant: &Rational, terms: &[(Expr, Rational)], scale: &Rational) -> Vec<Piece> {
        let mut list = Vec::with_capacity(terms.len() + 1);
        if !constant.is_zero() {
            let key = self.keys.term(self.arena, Arena::ONE);
            list.push(Piece { core: Arena::ONE, coefficient: constant.mul(scale), key });
        }
        for (core, c) in terms {
            let key = self.keys.term(self.arena, *core);
            list.push(Piece { core: *core, coefficient: c.mul(scale), key });
        }
        list.sort_by(|a, b| a.key.cmp(&b.key));
        list
    }

    /// A sum in its order, a positive summand first if there is one.
    fn sum(&mut self, constant: &Rational, terms: &[(Expr, Rational)], scale: &Rational) -> Form {
        let mut parts = match self.parts(constant, terms, scale) {
            Parts::Whole(negative, form) => return form.signed(negative),
            Parts::Sum(parts) => parts,
        };
        if parts.iter().all(|p| p.summand.negative) {
            // The first product that can take the sign into one of its sums leads.
            if let Some(p) = parts.iter_mut().find_map(|p| turn(&mut p.summand.form).then_some(p)) {
                p.summand.negative = false;
            }
        }
        assemble(parts)
    }

    /// The summands in their order; a sum that is one product with a number in front as that.
    fn parts(&mut self, constant: &Rational, terms: &[(Expr, Rational)], scale: &Rational) -> Parts {
        let list = self.pieces(constant, terms, scale);
        let pure = |p: &Piece| p.core != Arena::ONE && !p.key.has_parameters();
        // A number in front of all: 2 (x + y) instead of 2 x + 2 y.
        let mut content = list[0].coefficient.abs();
        for p in &list {
            content = content.content(&p.coefficient);
        }
        let bare: usize = list.iter().map(|p| coefficient_cost(&p.coefficient)).sum();
        if !content.is_one() && !content.is_zero() && (list.iter().all(pure) || list.iter().all(|p| p.key.kind == 3)) {
            let inverse = content.recip().unwrap_or(Rational::ONE);
            let taken: usize = list.iter().map(|p| coefficient_cost(&p.coefficient.mul(&inverse))).sum();
            if taken + coefficient_cost(&content) < bare {
                let (negative, inner) = match self.sum(constant, terms, &scale.mul(&inverse)) {
                    Form::Sum(list) if list.iter().all(|s| s.negative) => (true, Form::Sum(list).signed(true)),
                    inner => (false, inner),
                };
                return Parts::Whole(negative, product(content, vec![inner], vec![]));
            }
        }
        // Like terms without parameters share a number: 1/2 (x² + y²) + x² y.
        let mut out: Vec<Part> = Vec::with_capacity(list.len());
        let mut done = vec![false; list.len()];
        for i in 0..list.len() {
            if done[i] {
                continue;
            }
            let c = list[i].coefficient.abs();
            let group: Vec<usize> = (i..list.len())
                .filter(|&j| {
                    !done[j]
                        && pure(&list[i])
                        && pure(&list[j])
                        && list[j].coefficient.abs() == c
                        && list[j].key.alike(&list[i].key)
                })
                .collect();
            if c.is_one() || group.len() < 2 || group.len() == list.len() {
                let (negative, form, free) = self.product(list[i].core, &list[i].coefficient);
                out.push(Part { summand: Summand { negative, form, free }, key: list[i].key.clone(), size: c });
                continue;
            }
            let mut inner = Vec::new();
            let lead = list[i].coefficient.is_negative();
            for j in group {
                done[j] = true;
                let (negative, form, free) = self.product(list[j].core, &Rational::ONE);
                inner.push(Summand { negative: negative ^ list[j].coefficient.is_negative() ^ lead, form, free });
            }
            let form = Form::Product { coefficient: c.clone(), top: vec![Form::Sum(inner)], bottom: vec![] };
            out.push(Part { summand: Summand { negative: lead, form, free: None }, key: list[i].key.clone(), size: c });
        }
        if out.len() == 1 {
            let s = out.remove(0).summand;
            return Parts::Whole(s.negative, s.form);
        }
        Parts::Sum(out)
    }

    /// `c · core` as a product of powers and a fraction.
    fn product(&mut self, core: Expr, c: &Rational) -> (bool, Form, Free) {
        if core == Arena::ONE {
            return (c.is_negative(), Form::Number(c.abs()), None);
        }
        if let Some(k) = self.abbreviations.get(&core) {
            let form = Form::Abbreviation(*k);
            return (c.is_negative(), product(c.abs(), vec![form], vec![]), None);
        }
        let mut negative = c.is_negative();
        let mut c = c.abs();
        let mut factors = self.arena.factors(core);
        let mut keyed: Vec<_> = factors.drain(..).map(|(b, e)| (self.keys.factor(self.arena, b), b, e)).collect();
        keyed.sort_by(|a, b| a.0.cmp(&b.0));
        let sums = keyed.iter().filter(|(_, b, e)| e.is_one() && self.is_sum(*b)).count();
        let mut top = Vec::new();
        let mut bottom = Vec::new();
        let mut turnable = None;
        for (_, base, exponent) in keyed {
            let below = exponent.is_negative();
            let e = exponent.abs();
            let odd = e.is_integer() && !e.is_even_integer();
            let form = match self.arena.node(base) {
                Node::Sum(k, terms) if e.is_integer() && !self.abbreviations.contains_key(&base) => {
                    let (k, terms) = (k.clone(), terms.clone());
                    let mut scale = Rational::ONE;
                    if sums == 1 && exponent.is_one() && !c.is_one() && self.absorbs(&k, &terms, &c) {
                        scale = std::mem::replace(&mut c, Rational::ONE);
                    }
                    match self.parts(&k, &terms, &scale) {
                        Parts::Whole(minus, form) => {
                            negative ^= minus && odd;
                            raise(form, &e)
                        }
                        Parts::Sum(mut parts) => {
                            let (flip, free) = orientation(&parts, odd);
                            if flip {
                                parts.iter_mut().for_each(|p| p.summand.negate());
                                negative ^= odd;
                            }
                            if free {
                                turnable = Some((
                                    below,
                                    if below { bottom.len() } else { top.len() },
                                    parts.clone(),
                                    e.clone(),
                                ));
                            }
                            raise(assemble(parts), &e)
                        }
                    }
                }
                _ => {
                    let (minus, form) = self.power(base, &e);
                    negative ^= minus;
                    form
                }
            };
            if below { bottom.push(form) } else { top.push(form) }
        }
        let free = turnable.as_ref().map(|t| (t.0, t.1));
        if negative && let Some((below, i, mut parts, e)) = turnable {
            // −k (x₁ − x₂) = k (x₂ − x₁).
            parts.iter_mut().for_each(|p| p.summand.negate());
            let place = if below { &mut bottom[i] } else { &mut top[i] };
            *place = raise(assemble(parts), &e);
            negative = false;
        }
        (negative, product(c, top, bottom), free)
    }

    fn is_sum(&self, e: Expr) -> bool {
        matches!(self.arena.node(e), Node::Sum(..))
    }

    /// Whether the number in front is better multiplied into the sum: m l (1/2 l θ̇² + g cos θ).
    fn absorbs(&self, constant: &Rational, terms: &[(Expr, Rational)], c: &Rational) -> bool {
        let cost = |x: &Rational, scaled: bool| {
            let x = if scaled { x.mul(c) } else { x.clone() };
            coefficient_cost(&x)
        };
        let mut outside = coefficient_cost(c);
        let mut inside = 0;
        if !constant.is_zero() {
            outside += usize::from(!constant.is_integer());
            inside += usize::from(!constant.mul(c).is_integer());
        }
        for t in terms {
            outside += cost(&t.1, false);
            inside += cost(&t.1, true);
        }
        inside < outside
    }

    /// `base ^ exponent` for a positive exponent, with the sign that came out of an odd function.
    fn power(&mut self, base: Expr, exponent: &Rational) -> (bool, Form) {
        let odd = exponent.is_integer() && !exponent.is_even_integer();
        let (minus, form) = self.atom(base);
        if minus && !exponent.is_integer() {
            return (false, raise(form.signed(true), exponent));
        }
        (minus && odd, raise(form, exponent))
    }

    fn atom(&mut self, e: Expr) -> (bool, Form) {
        if let Some(k) = self.abbreviations.get(&e) {
            return (false, Form::Abbreviation(*k));
        }
        let form = match self.arena.node(e) {
            Node::Number(r) => return (r.is_negative(), Form::Number(r.abs())),
            Node::Pi => Form::Pi,
            Node::Undefined => Form::Undefined,
            Node::Symbol(s) => self.name(*s, 0),
            Node::Jet(s, order) => self.name(*s, *order),
            Node::Member { family, index, order } => {
                let (family, index, order) = (*family, *index, *order);
                let index = Box::new(self.compose(index));
                let info = self.arena.info(family);
                let (name, role) = (info.name.clone(), info.role);
                Form::Name(Name { symbol: family, role, name, member: Member::Index(index), order })
            }
            Node::Sum(..) | Node::Product(_) => return (false, self.compose(e)),
            Node::Power(b, x) => {
                let (b, x) = (*b, *x);
                Form::Exponential(Box::new(self.compose(b)), Box::new(self.compose(x)))
            }
            Node::Call(f, args) => {
                let (f, args) = (*f, args.clone());
                let mut minus = false;
                let mut list = Vec::with_capacity(args.len());
                for &a in args.iter() {
                    let form = self.compose(a);
                    list.push(if (f.is_odd() || f.is_even()) && self.turned(a) {
                        minus ^= f.is_odd();
                        lead_positive(form.signed(true))
                    } else {
                        form
                    });
                }
                if f == Function::Min || f == Function::Max {
                    list.sort_by_key(crate::display::plain::render);
                }
                return (minus, Form::Call(f, list));
            }
            Node::Unspecified { function, index, orders, args } => {
                let (function, index, orders, args) = (*function, *index, orders.clone(), args.clone());
                let info = self.arena.info(function);
                let name = info.name.clone();
                let member = match (index, info.member) {
                    (Some(i), _) => Member::Index(Box::new(self.compose(i))),
                    (None, Some(k)) => Member::Number(k),
                    (None, None) => Member::None,
                };
                let args = args.iter().map(|a| self.compose(*a)).collect();
                Form::Unspecified { function, name, member, orders, args }
            }
            Node::Bound { index, lower, upper, body } => {
                let (index, lower, upper, body) = (*index, *lower, *upper, *body);
                let (lower, upper) = (Box::new(self.compose(lower)), Box::new(self.compose(upper)));
                self.active.push(index);
                let name = self.letter(index);
                let body = Box::new(self.compose(body));
                self.active.pop();
                Form::Bound { index, name, lower, upper, body }
            }
        };
        (false, form)
    }

    /// Whether the argument of an even or odd function reads better with the other sign: θ₁ − θ₂, not θ₂ − θ₁.
    fn turned(&mut self, e: Expr) -> bool {
        match self.arena.node(e) {
            Node::Sum(c, terms) => {
                let (c, terms) = (c.clone(), terms.clone());
                let list = self.pieces(&c, &terms, &Rational::ONE);
                list[0].coefficient.is_negative()
            }
            _ => false,
        }
    }

    fn name(&mut self, symbol: Symbol, order: u16) -> Form {
        let info = self.arena.info(symbol);
        let (role, member) = (info.role, info.member);
        let name = if info.name.starts_with('#') { self.letter(symbol) } else { info.name.clone() };
        let member = member.map_or(Member::None, Member::Number);
        Form::Name(Name { symbol, role, name, member, order })
    }

    fn letter(&self, index: Symbol) -> Arc<str> {
        let name = &self.arena.info(index).name;
        let place = self.active.iter().rposition(|s| *s == index);
        place.and_then(|n| self.indices.get(n)).unwrap_or(name).clone()
    }
}

/// Whether a sum in a product is turned, and whether it may be turned again to make the product positive.
fn orientation(parts: &[Part], odd: bool) -> (bool, bool) {
    let minus = |p: &Part| p.summand.negative;
    let negatives = parts.iter().filter(|p| minus(p)).count();
    if parts[0].key.level.0 == 2 && negatives < parts.len() {
        // An acceleration leads and is positive, whatever the others are.
        return (minus(&parts[0]), odd && parts[0].summand.free.is_some());
    }
    if negatives == 0 || negatives == parts.len() {
        return (negatives > 0, false);
    }
    let coordinates: Vec<&Part> = parts.iter().filter(|p| p.key.kind == 1).collect();
    let rest = parts.iter().filter(|p| p.key.kind != 1).all(|p| matches!(p.key.kind, 2 | 3));
    match coordinates.as_slice() {
        // An elongation: the later coordinate is positive, x₂ − x₁ − l.
        [a, b]
            if rest
                && (parts.len() > 2 || !odd)
                && a.size == b.size
                && minus(a) != minus(b)
                && a.key.same_kind(&b.key) =>
        {
            return (minus(b), false);
        }
        // A coordinate against parameters, r − l₀.
        [a] if rest => return (minus(a), false),
        _ => {}
    }
    if odd {
        return (minus(&parts[0]), true);
    }
    // √(x² + y²) − l₀, not l₀ − √(x² + y²).
    (minus(parts.iter().find(|p| p.key.kind != 3).unwrap_or(&parts[0])), false)
}

/// A sum of parts, a positive one first if there is one.
fn assemble(parts: Vec<Part>) -> Form {
    lead_positive(Form::Sum(parts.into_iter().map(|p| p.summand).collect()))
}

/// Turns a sum of both signs in a product, and says whether it did: −k (x₁ − x₂) = k (x₂ − x₁). Sums that begin with an
/// acceleration stay as they are.
fn turn(form: &mut Form) -> bool {
    fn sum(form: &mut Form) -> bool {
        match form {
            Form::Sum(list) if list.len() > 1 && list.iter().any(|s| s.negative) => {
                let kept = list[0].form.begins_with_acceleration();
                if kept && !turn(&mut list[0].form) {
                    return false;
                }
                list.iter_mut().skip(usize::from(kept)).for_each(Summand::negate);
                Form::lead_positive(list);
                true
            }
            // No minus here, but one further in that can be turned: g (1 − cos θ) − b.
            Form::Sum(list) if list.len() > 1 => {
                let Some(i) = list.iter_mut().position(|s| turn(&mut s.form)) else { return false };
                list.iter_mut().for_each(|s| s.negative = true);
                list[i].negative = false;
                Form::lead_positive(list);
                true
            }
            Form::Power(base, e) if e.is_integer() && !e.is_even_integer() => sum(base),
            _ => false,
        }
    }
    match form {
        Form::Product { top, bottom, .. } => top.iter_mut().rev().chain(bottom.iter_mut().rev()).any(sum),
        other => matches!(other, Form::Power(..)) && sum(other),
    }
}

/// `form ^ exponent` for a positive exponent.
fn raise(form: Form, exponent: &Rational) -> Form {
    if exponent.is_one() {
        form
    } else if *exponent == Rational::HALF {
        Form::Root(Box::new(form))
    } else {
        Form::Power(Box::new(form), exponent.clone())
    }
}

/// A product, or its only factor.
fn product(coefficient: Rational, mut top: Vec<Form>, bottom: Vec<Form>) -> Form {
    if coefficient.is_one() && bottom.is_empty() && top.len() == 1 {
        return top.remove(0);
    }
    Form::Product { coefficient, top, bottom }
}

/// A sum with a positive summand first, if there is one.
fn lead_positive(form: Form) -> Form {
    match form {
        Form::Sum(mut list) => {
            Form::lead_positive(&mut list);
            Form::Sum(list)
        }
        form => form,
    }
}

/// Letters for bound indices, the outermost first, none of which is a name in use.
fn letters(arena: &Arena, roots: &[Expr], options: &DisplayOptions) -> Vec<Arc<str>> {
    let mut depth = 0usize;
    for r in roots {
        depth = depth.max(arena.meta(*r).bound_depth as usize);
    }
    if depth == 0 {
        return Vec::new();
    }
    let mut used = hashbrown::HashSet::new();
    for r in roots {
        arena.visit(*r, &mut |_, node| {
            let s = match node {
                Node::Symbol(s) | Node::Jet(s, _) => *s,
                Node::Member { family, .. } => *family,
                Node::Unspecified { function, .. } => *function,
                _ => return,
            };
            used.insert(arena.info(s).name.clone());
        });
    }
    let candidates = options.index_names.iter().map(|n| Arc::from(n.as_str())).chain((1..).map(|n: usize| {
        let digits: String =
            n.to_string().chars().filter_map(|c| char::from_u32('₀' as u32 + c.to_digit(10)?)).collect();
        Arc::from(format!("i{digits}"))
    }));
    candidates.filter(|c: &Arc<str>| !used.contains(c)).take(depth).collect()
}

impl TermKey {
    fn same_kind(&self, other: &TermKey) -> bool {
        match (self.only(), other.only()) {
            (Some(a), Some(b)) => a.same_kind(b),
            _ => false,
        }
    }

    fn has_parameters(&self) -> bool {
        self.classes().any(|c| c == class::PARAMETER)
    }
}
