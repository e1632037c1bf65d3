//! The presentational tree: what stands where on the page, before an alphabet is chosen.
//!
//! Signs belong to summands, fractions have a top and a bottom, roots and sums are already ordered. The tree keeps its
//! symbols, so that it can be turned back into the expression that it shows.

use crate::arena::{Arena, Expr, Role, Symbol};
use crate::budget::{Budget, Stopped};
use crate::function::Function;
use crate::rational::Rational;
use std::sync::Arc;

/// A name with its index and its time derivatives.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Name {
    /// What it stands for.
    pub symbol: Symbol,
    /// Its role.
    pub role: Role,
    /// How it is spelled.
    pub name: Arc<str>,
    /// The member of a family.
    pub member: Member,
    /// Order of the time derivative.
    pub order: u16,
}

/// The index of a member.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Member {
    /// Not of a family.
    None,
    /// A known member.
    Number(i64),
    /// A symbolic index.
    Index(Box<Form>),
}

/// A summand with its sign.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Summand {
    /// Whether it is subtracted.
    pub negative: bool,
    /// What is added or subtracted; never negative itself.
    pub form: Form,
    /// Where in a product there is a sum that may take the sign: below the line or above, which factor.
    pub free: Option<(bool, usize)>,
}

impl Summand {
    /// Changes the sign, inside where that makes it positive.
    pub fn negate(&mut self) {
        if self.negative {
            self.negative = false;
            return;
        }
        let place = match (&mut self.form, self.free) {
            (Form::Product { bottom, .. }, Some((true, i))) => bottom.get_mut(i),
            (Form::Product { top, .. }, Some((false, i))) => top.get_mut(i),
            (form, Some(_)) => Some(form),
            (_, None) => None,
        };
        self.negative = !place.is_some_and(Form::flip);
    }
}

/// A node of the presentational tree.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Form {
    /// A number, not negative.
    Number(Rational),
    /// π.
    Pi,
    /// A value that does not exist.
    Undefined,
    /// A name.
    Name(Name),
    /// Two summands or more, or one with a minus.
    Sum(Vec<Summand>),
    /// `coefficient · top / bottom` with a positive coefficient.
    Product {
        /// The number in front.
        coefficient: Rational,
        /// Factors above the line.
        top: Vec<Form>,
        /// Factors below the line.
        bottom: Vec<Form>,
    },
    /// A power with a positive number other than 1 and 1/2.
    Power(Box<Form>, Rational),
    /// A power with any exponent.
    Exponential(Box<Form>, Box<Form>),
    /// A square root.
    Root(Box<Form>),
    /// A known function.
    Call(Function, Vec<Form>),
    /// An unspecified function and its derivatives.
    Unspecified {
        /// The function.
        function: Symbol,
        /// How it is spelled.
        name: Arc<str>,
        /// The member of a family of functions.
        member: Member,
        /// Derivative orders by argument.
        orders: Arc<[u16]>,
        /// The arguments.
        args: Vec<Form>,
    },
    /// A sum over an index.
    Bound {
        /// The index.
        index: Symbol,
        /// The letter that is shown for it.
        name: Arc<str>,
        /// First value.
        lower: Box<Form>,
        /// Last value.
        upper: Box<Form>,
        /// The summand.
        body: Box<Form>,
    },
    /// The abbreviation of that number.
    Abbreviation(usize),
}

/// Operations in writing a coefficient before something: a numerator other than one, a denominator other than one.
pub(crate) fn coefficient_cost(c: &Rational) -> usize {
    if c.is_one() {
        return 0;
    }
    let (n, d) = c.digits();
    usize::from(n != "1" && n != "-1") + usize::from(d != "1")
}

impl Form {
    /// The form without a minus, and whether it had one.
    pub fn unsigned(self) -> (bool, Form) {
        match self {
            Form::Sum(mut list) if list.len() == 1 => {
                let s = list.remove(0);
                (s.negative, s.form)
            }
            other => (false, other),
        }
    }

    /// Changes the sign of a sum of both signs, or of its odd power, and says whether it could.
    pub fn flip(&mut self) -> bool {
        match self {
            Form::Sum(list) if list.len() > 1 && list.iter().any(|s| s.negative) => {
                list.iter_mut().for_each(Summand::negate);
                Form::lead_positive(list);
                true
            }
            Form::Power(base, e) if e.is_integer() && !e.is_even_integer() => base.flip(),
            _ => false,
        }
    }

    /// A positive summand first, if there is one.
    pub fn lead_positive(list: &mut [Summand]) {
        if let Some(first) = list.iter().position(|s| !s.negative) {
            list[..=first].rotate_right(1);
        }
    }

    /// The form with a minus where `negative`.
    pub fn signed(self, negative: bool) -> Form {
        match self {
            form if !negative => form,
            Form::Sum(mut list) => {
                list.iter_mut().for_each(Summand::negate);
                if list.len() == 1 && !list[0].negative { list.remove(0).form } else { Form::Sum(list) }
            }
            form => Form::Sum(vec![Summand { negative: true, form, free: None }]),
        }
    }

    /// Whether the last factor of it is an acceleration.
    pub fn begins_with_acceleration(&self) -> bool {
        match self {
            Form::Name(n) => n.order >= 2,
            Form::Product { top, .. } => top.last().is_some_and(Form::begins_with_acceleration),
            _ => false,
        }
    }

    /// Binary operations, function calls, powers, signs in front; a fraction p/q counts as written.
    pub fn operations(&self) -> usize {
        match self {
            Form::Number(r) => usize::from(!r.is_integer()),
            Form::Pi | Form::Undefined | Form::Abbreviation(_) => 0,
            Form::Name(n) => n.member.operations(),
            Form::Sum(list) => {
                let inner: usize = list.iter().map(|s| s.form.operations()).sum();
                inner + list.len() - 1 + usize::from(list[0].negative)
            }
            Form::Product { coefficient, top, bottom } => {
                let inner: usize = top.iter().chain(bottom).map(Form::operations).sum();
                let (n, d) = coefficient.digits();
                let above = top.len() + usize::from(n != "1");
                let below = bottom.len() + usize::from(d != "1");
                inner + above.saturating_sub(1) + below.saturating_sub(1) + usize::from(below > 0)
            }
            Form::Power(base, exponent) => 1 + base.operations() + usize::from(!exponent.is_integer()),
            Form::Exponential(base, exponent) => 1 + base.operations() + exponent.operations(),
            Form::Root(base) => 1 + base.operations(),
            Form::Call(_, args) => 1 + args.iter().map(Form::operations).sum::<usize>(),
            Form::Unspecified { member, args, .. } => {
                1 + member.operations() + args.iter().map(Form::operations).sum::<usize>()
            }
            Form::Bound { lower, upper, body, .. } => 1 + lower.operations() + upper.operations() + body.operations(),
        }
    }

    /// The expression that is shown. Costs one constructor per node of the tree.
    pub fn to_expr(&self, arena: &mut Arena, abbreviations: &[Expr]) -> Result<Expr, Stopped> {
        let all = |arena: &mut Arena, list: &[Form]| -> Result<Vec<Expr>, Stopped> {
            list.iter().map(|f| f.to_expr(arena, abbreviations)).collect()
        };
        Ok(match self {
            Form::Number(r) => arena.number(r.clone()),
            Form::Pi => arena.pi(),
            Form::Undefined => Arena::UNDEFINED,
            Form::Name(n) => match &n.member {
                Member::Index(index) => {
                    let index = index.to_expr(arena, abbreviations)?;
                    arena.member(n.symbol, index, n.order)
                }
                _ => arena.jet(n.symbol, n.order),
            },
            Form::Sum(list) => {
                let mut terms = Vec::with_capacity(list.len());
                for s in list {
                    let e = s.form.to_expr(arena, abbreviations)?;
                    terms.push((e, if s.negative { Rational::MINUS_ONE } else { Rational::ONE }));
                }
                arena.linear(&terms)
            }
            Form::Product { coefficient, top, bottom } => {
                let mut factors = vec![(arena.number(coefficient.clone()), Rational::ONE)];
                for e in all(arena, top)? {
                    factors.push((e, Rational::ONE));
                }
                for e in all(arena, bottom)? {
                    factors.push((e, Rational::MINUS_ONE));
                }
                arena.monomial(&factors)
            }
            Form::Power(base, exponent) => {
                let base = base.to_expr(arena, abbreviations)?;
                arena.pow_rational(base, exponent)
            }
            Form::Exponential(base, exponent) => {
                let base = base.to_expr(arena, abbreviations)?;
                let exponent = exponent.to_expr(arena, abbreviations)?;
                arena.power(base, exponent)
            }
            Form::Root(base) => {
                let base = base.to_expr(arena, abbreviations)?;
                arena.sqrt(base)
            }
            Form::Call(f, args) => {
                let args = all(arena, args)?;
                arena.call(*f, &args)
            }
            Form::Unspecified { function, member, orders, args, .. } => {
                let index = match member {
                    Member::Index(index) => Some(index.to_expr(arena, abbreviations)?),
                    _ => None,
                };
                let args = all(arena, args)?;
                arena.unspecified(*function, index, orders, &args)
            }
            Form::Bound { index, lower, upper, body, .. } => {
                let lower = lower.to_expr(arena, abbreviations)?;
                let upper = upper.to_expr(arena, abbreviations)?;
                let body = body.to_expr(arena, abbreviations)?;
                arena.bound(*index, lower, upper, body, &mut Budget::new(1_000_000))?
            }
            Form::Abbreviation(k) => abbreviations.get(*k).copied().unwrap_or(Arena::UNDEFINED),
        })
    }
}

impl Member {
    fn operations(&self) -> usize {
        match self {
            Member::Index(f) => f.operations(),
            _ => 0,
        }
    }
}
