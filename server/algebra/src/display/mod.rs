//! How an expression is printed: as a textbook would, in Unicode, in plain ASCII operators, in LaTeX.

mod abbreviate;
mod compose;
mod cost;
mod factor;
mod form;
mod latex;
mod order;
mod plain;
mod polynomial;
mod simplify;
mod text;
mod trigonometry;

#[cfg(test)]
mod tests;

use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};
use compose::Composer;
use form::Form;
use order::Keys;
use simplify::Simplifier;

/// The three spellings of a formula.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Printed {
    /// Unicode, for hovers and terminals; parses back in the model language.
    pub text: String,
    /// ASCII operators, explicit products, primes.
    pub plain: String,
    /// LaTeX.
    pub latex: String,
}

/// What a print may cost and which letters it may use. The order never depends on declarations.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct DisplayOptions {
    /// Past so many monomials the expression stays unexpanded.
    pub monomials: usize,
    /// Past so many nodes on the page, common parts become abbreviations.
    pub page: usize,
    /// Letters for bound indices, those in use left out.
    pub index_names: Vec<String>,
    /// Letters for abbreviations, those in use left out.
    pub abbreviation_names: Vec<String>,
}

impl Default for DisplayOptions {
    fn default() -> Self {
        let letters = |list: &str| list.chars().map(String::from).collect();
        DisplayOptions {
            monomials: 4000,
            page: 4000,
            index_names: letters("ijklnpqrs"),
            abbreviation_names: letters("ABCDEFGHKLNPQRSTUVWXYZ"),
        }
    }
}

/// A formula laid out, ready to be spelled.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Layout {
    form: Form,
    /// The parts written apart, `where A = …`. Each may use those before it.
    pub abbreviations: Vec<(String, Layout)>,
}

/// Formulas nested more deeply are not simplified.
const MAX_DEPTH: u32 = 300;

/// Past so many bytes a formula with its abbreviations written out is not spelled in plain.
const MAX_PLAIN: usize = 4_000_000;

impl Layout {
    fn letters(&self) -> Vec<String> {
        self.abbreviations.iter().map(|a| a.0.clone()).collect()
    }

    /// The formula in Unicode, without its abbreviations.
    fn text_alone(&self, letters: &[String]) -> String {
        text::render(&self.form, letters)
    }

    /// Unicode, followed by `where A = …` on lines of their own.
    pub fn text(&self) -> String {
        let letters = self.letters();
        let mut out = self.text_alone(&letters);
        for (i, (name, inner)) in self.abbreviations.iter().enumerate() {
            let lead = if i == 0 { "where" } else { "     " };
            out.push_str(&format!("\n{lead} {name} = {}", inner.text_alone(&letters)));
        }
        out
    }

    /// Plain, abbreviations written out. `None` where that would be too long.
    pub fn try_plain(&self) -> Option<String> {
        let mut spelled: Vec<String> = vec![String::new(); self.abbreviations.len()];
        for (i, (_, inner)) in self.abbreviations.iter().enumerate() {
            spelled[i] = plain::render_with(&inner.form, &spelled);
            if spelled[i].len() > MAX_PLAIN {
                return None;
            }
        }
        let out = plain::render_with(&self.form, &spelled);
        (out.len() <= MAX_PLAIN).then_some(out)
    }

    /// Plain, abbreviations written out; `too large to print` where that would be too long.
    pub fn plain(&self) -> String {
        self.try_plain().unwrap_or_else(|| "too large to print".to_string())
    }

    /// LaTeX, abbreviations after `\quad\text{where}`.
    pub fn latex(&self) -> String {
        let letters = self.letters();
        let mut out = latex::render(&self.form, &letters);
        for (i, (name, inner)) in self.abbreviations.iter().enumerate() {
            let lead = if i == 0 { " \\quad \\text{where} \\quad " } else { ", \\quad " };
            out.push_str(&format!("{lead}{name} = {}", latex::render(&inner.form, &letters)));
        }
        out
    }

    /// All three spellings.
    pub fn printed(&self) -> Printed {
        Printed { text: self.text(), plain: self.plain(), latex: self.latex() }
    }

    /// Binary operations, function calls, powers and leading signs, abbreviations counted.
    pub fn operations(&self) -> usize {
        self.form.operations() + self.abbreviations.iter().map(|a| a.1.form.operations()).sum::<usize>()
    }

    /// The expression that is shown, in the arena that it came from.
    pub fn to_expr(&self, arena: &mut Arena) -> Result<Expr, Stopped> {
        let mut known = Vec::with_capacity(self.abbreviations.len());
        for (_, inner) in &self.abbreviations {
            let e = inner.form.to_expr(arena, &known)?;
            known.push(e);
        }
        self.form.to_expr(arena, &known)
    }
}

/// The textbook form: simplified, collected, factored, fewest operations. Equal to `e` by construction; never longer than
/// [`verbatim`]. Where the budget does not suffice it is `verbatim` itself.
pub fn textbook(arena: &mut Arena, e: Expr, options: &DisplayOptions, budget: &mut Budget) -> Layout {
    if arena.depth(e) > MAX_DEPTH {
        return verbatim(arena, e, options);
    }
    let mut keys = Keys::default();
    let simplified = match Simplifier::new(arena, options, &mut keys).simplify(e, 0, budget) {
        Ok(simplified) => simplified,
        Err(_) => e,
    };
    let shown = lay_out(arena, simplified, options, &mut keys);
    if simplified == e {
        return shown;
    }
    let source = lay_out(arena, e, options, &mut keys);
    if source.operations() < shown.operations() { source } else { shown }
}

/// The expression as it is, ordered, nothing simplified.
pub fn verbatim(arena: &Arena, e: Expr, options: &DisplayOptions) -> Layout {
    lay_out(arena, e, options, &mut Keys::default())
}

fn lay_out(arena: &Arena, e: Expr, options: &DisplayOptions, keys: &mut Keys) -> Layout {
    let mut composer = Composer::new(arena, keys, &[e], options);
    let parts = abbreviate::common_parts(arena, e, options);
    let names = abbreviate::names(arena, e, parts.len(), options);
    let mut abbreviations = Vec::with_capacity(parts.len());
    for (k, part) in parts.iter().enumerate() {
        let form = composer.compose(*part);
        abbreviations.push((names[k].clone(), Layout { form, abbreviations: Vec::new() }));
        composer.abbreviations.insert(*part, k);
    }
    let form = composer.compose(e);
    Layout { form, abbreviations }
}
