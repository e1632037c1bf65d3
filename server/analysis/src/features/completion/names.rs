//! The names of a model, ranked by what its place in a formula wants.

use super::context::{Binder, Place, Wanted};
use super::heads::{Known, Origin};
use super::pieces::{primed, read};
use super::units::{Fitting, of_value};
use super::words::{constant, constants, functions, of_claims};
use super::{Completion, CompletionKind, plain};
use crate::scope::SymbolKind;
use leastwise_grammar::{RawItem, WordKind, fold_name, read_name, words};
use std::collections::HashSet;

/// Names that stand in so many items around the cursor's are near.
const NEAR: usize = 3;

/// No longer item is looked through for names that are near.
const SHORT: usize = 10_000;

/// What a list of names is made from.
pub(super) struct Model<'m> {
    pub items: &'m [RawItem],
    pub known: &'m [Known],
    /// The item that is being typed.
    pub item: Option<usize>,
    /// What stands right behind the word that is being typed.
    pub follows: Option<char>,
}

/// The names that can stand in a formula, best first, in groups.
pub(super) fn in_formula(model: &Model<'_>, place: &Place) -> Vec<Vec<Completion>> {
    let ranked = Ranked::new(model, place);
    match place.wanted {
        Wanted::Anything => ranked.anything(),
        Wanted::ActedOn => ranked.formula(&[Coordinates, Definitions, Velocities, Parameters, Functions]),
        Wanted::Image => ranked.formula(&[Coordinates, Time, Parameters, Definitions, Functions, Inputs]),
        Wanted::SignalValue => ranked.formula(&[Time, Parameters, Motion, Definitions, Functions, Inputs]),
        Wanted::Index => vec![ranked.bound(&[Binder::Index]), ranked.indices(), ranked.whole()],
        Wanted::FamilyIndex => vec![ranked.indices()],
        Wanted::SumIndex => vec![ranked.indices()],
        Wanted::Whole => vec![ranked.bound(&[Binder::Index, Binder::Formal]), ranked.whole()],
        Wanted::Moved => vec![ranked.moved()],
        Wanted::State => vec![ranked.state()],
        Wanted::Signal => vec![ranked.signals()],
        Wanted::Coordinate => vec![ranked.group(Coordinates)],
        Wanted::Axis => {
            let mut groups = ranked.formula(&[Definitions, Parameters, Coordinates]);
            groups.insert(0, constants().into_iter().filter(|c| c.label.starts_with('e')).collect());
            groups
        }
        Wanted::Matrix => ranked.formula(&[Definitions, Coordinates, Parameters, Functions]),
        Wanted::Constant => vec![ranked.group(Parameters)],
    }
}

/// A kind of name in the ranking.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Group {
    /// Each coordinate, its velocity behind it.
    Motion,
    Coordinates,
    Velocities,
    /// Parameters; those near the cursor first.
    Parameters,
    /// Parameters that are coefficients of squared velocities first.
    Inertias,
    /// Parameters that are coefficients of losses first.
    Dampings,
    Inputs,
    /// Definitions without arguments.
    Definitions,
    /// Definitions that move, with their time derivatives.
    Moving,
    Functions,
    Time,
}

use Group::*;

struct Ranked<'r> {
    model: &'r Model<'r>,
    place: &'r Place,
    /// The names that stand in or near the item.
    near: HashSet<String>,
    /// The definitions that depend on the motion or the time.
    moving: HashSet<&'r str>,
}

impl<'r> Ranked<'r> {
    fn new(model: &'r Model<'r>, place: &'r Place) -> Ranked<'r> {
        let at = model.item.unwrap_or(model.items.len());
        let around = at.saturating_sub(NEAR)..(at + NEAR + 1).min(model.items.len());
        let texts = model.items[around].iter().map(|i| i.text.as_str()).filter(|t| t.len() < SHORT);
        let near = texts.flat_map(mentioned).collect();
        Ranked { model, place, near, moving: moving(model.known) }
    }

    /// What an item of this kind is usually made of.
    fn anything(&self) -> Vec<Vec<Completion>> {
        let order: &[Group] = match self.place.item {
            "kinetic" => &[Velocities, Inertias, Moving, Coordinates, Parameters, Definitions, Functions, Inputs],
            "potential" => &[Coordinates, Parameters, Definitions, Functions, Inputs, Velocities],
            "dissipation" => &[Velocities, Dampings, Moving, Parameters, Coordinates, Definitions, Functions, Inputs],
            "force" => &[Inputs, Motion, Parameters, Definitions, Functions],
            "assume" => &[Parameters, Coordinates, Definitions, Functions, Inputs],
            _ => &[Motion, Parameters, Definitions, Functions, Inputs],
        };
        let mut groups = self.formula(order);
        if self.place.item == "conserved" {
            groups.insert(groups.len().min(1), of_claims());
        }
        if matches!(self.place.item, "let" | "run") {
            groups.push(self.accelerations());
        }
        groups
    }

    /// Bound names, groups of declared ones, then what the language brings along.
    fn formula(&self, order: &[Group]) -> Vec<Vec<Completion>> {
        let declared = order.iter().map(|g| self.group(*g));
        if self.model.follows == Some('[') {
            return declared.collect();
        }
        let mut groups = vec![self.bound(&[Binder::Index, Binder::Formal, Binder::Transformation])];
        groups.extend(declared);
        if !self.follows_prime() {
            let families = self.model.known.iter().any(|k| k.index.is_some());
            groups.push(functions(families));
            groups.push(constants());
        }
        groups
    }

    fn bound(&self, binders: &[Binder]) -> Vec<Completion> {
        let bound = self.place.bound.iter().filter(|b| binders.contains(&b.binder));
        bound
            .map(|b| match b.binder {
                Binder::Transformation => {
                    plain(&b.name, CompletionKind::Constant, "the parameter of the transformation", None)
                }
                Binder::Formal => plain(&b.name, CompletionKind::Parameter, "argument", None),
                Binder::Index => plain(&b.name, CompletionKind::Index, "index", None),
            })
            .collect()
    }

    fn group(&self, group: Group) -> Vec<Completion> {
        let of = |kind| self.of(kind).filter(|k| !k.is_function());
        match group {
            Motion => of(SymbolKind::Coordinate).flat_map(|k| [self.named(k), self.velocities(k)].concat()).collect(),
            Coordinates => self.sources_first(of(SymbolKind::Coordinate)).flat_map(|k| self.named(k)).collect(),
            Velocities => of(SymbolKind::Coordinate).flat_map(|k| self.velocities(k)).collect(),
            Parameters => self.near_first(of(SymbolKind::Parameter)).flat_map(|k| self.named(k)).collect(),
            Inertias => self.fitting(Fitting::is_inertia),
            Dampings => self.fitting(Fitting::is_damping),
            Inputs => of(SymbolKind::Input).flat_map(|k| self.named(k)).collect(),
            Definitions => {
                let mut list: Vec<&Known> = self.near_first(of(SymbolKind::Definition)).collect();
                list.sort_by_key(|k| !self.moving.contains(k.name.as_str()));
                list.into_iter().flat_map(|k| self.named(k)).collect()
            }
            Moving => {
                let moving = of(SymbolKind::Definition).filter(|k| self.moving.contains(k.name.as_str()));
                self.near_first(moving).flat_map(|k| [self.rates(k), self.named(k)].concat()).collect()
            }
            Functions => {
                let functions = self.model.known.iter().filter(|k| k.is_function());
                self.near_first(functions.filter(|k| self.is_free(k)))
                    .map(|k| self.shown(k, k.written.clone()))
                    .collect()
            }
            Time => constant("t").into_iter().collect(),
        }
    }

    /// The names of a kind that nothing in the item hides, and that may stand in it.
    fn of(&self, kind: SymbolKind) -> impl Iterator<Item = &'r Known> {
        self.model.known.iter().filter(move |k| k.kind == kind && self.is_free(k))
    }

    fn is_free(&self, k: &Known) -> bool {
        // Before a bracket stands what has members or components.
        if self.model.follows == Some('[') && k.index.is_none() && k.kind != SymbolKind::Definition {
            return false;
        }
        let own = self.place.item == "let" && self.model.item.is_some_and(|at| k.origin == Origin::Item(at));
        !own && self.place.bound.iter().all(|b| b.name != k.name)
    }

    fn near_first(&self, list: impl Iterator<Item = &'r Known>) -> impl Iterator<Item = &'r Known> {
        let mut list: Vec<&Known> = list.collect();
        list.sort_by_key(|k| !self.near.contains(&k.name));
        list.into_iter()
    }

    fn sources_first(&self, list: impl Iterator<Item = &'r Known>) -> impl Iterator<Item = &'r Known> {
        let mut list: Vec<&Known> = list.collect();
        list.sort_by_key(|k| !self.place.first.contains(&k.name));
        list.into_iter()
    }

    fn fitting(&self, fits: impl Fn(&Fitting) -> bool) -> Vec<Completion> {
        let of = |k: &Known| if k.quantity.is_empty() { of_value(&k.value) } else { Fitting::of(&k.quantity) };
        let list = self.of(SymbolKind::Parameter).filter(|k| of(k).is_some_and(|f| fits(&f)));
        self.near_first(list).flat_map(|k| self.named(k)).collect()
    }

    fn shown(&self, k: &Known, label: String) -> Completion {
        let kind = match k.kind {
            _ if k.is_function() => CompletionKind::Function,
            SymbolKind::Coordinate => CompletionKind::Coordinate,
            SymbolKind::Parameter | SymbolKind::Undeclared => CompletionKind::Parameter,
            SymbolKind::Input => CompletionKind::Input,
            SymbolKind::Index => CompletionKind::Index,
            SymbolKind::Definition => CompletionKind::Definition,
            SymbolKind::Function => CompletionKind::Function,
        };
        plain(&label, kind, &k.detail(), k.description.clone())
    }

    /// A name; of a family its member at the innermost index first.
    fn named(&self, k: &Known) -> Vec<Completion> {
        let member = self.member(k).map(|label| self.shown(k, label));
        member.into_iter().chain([self.shown(k, k.written.clone())]).collect()
    }

    /// The member of a family that is probably meant.
    fn member(&self, k: &Known) -> Option<String> {
        k.index.as_ref().filter(|_| self.model.follows != Some('['))?;
        let bound = self.place.bound.iter().find(|b| b.binder == Binder::Index)?;
        Some(format!("{}[{}]", k.written, bound.name))
    }

    /// The velocity in both spellings: `x'`, and `ẋ` where the name can bear the dot.
    fn velocities(&self, k: &Known) -> Vec<Completion> {
        let detail = format!("velocity of {}", k.written);
        match (self.follows_prime(), &k.index) {
            (true, _) => Vec::new(),
            (false, None) => self.derivatives(k, 1, &detail),
            // Of a family the prime stands behind the index.
            (false, Some(_)) => {
                let member = self.member(k).map(|m| format!("{m}'"));
                member
                    .map(|m| plain(&m, CompletionKind::Coordinate, &detail, k.description.clone()))
                    .into_iter()
                    .collect()
            }
        }
    }

    fn follows_prime(&self) -> bool {
        matches!(self.model.follows, Some('\'' | '′' | '″'))
    }

    fn derivatives(&self, k: &Known, order: u32, detail: &str) -> Vec<Completion> {
        let primed = primed(&k.written, order);
        let mut list = vec![plain(&primed, CompletionKind::Coordinate, detail, k.description.clone())];
        if let Some(dotted) = dotted(&k.written, order) {
            list.push(Completion {
                filter: primed,
                ..plain(&dotted, CompletionKind::Coordinate, detail, k.description.clone())
            });
        }
        list
    }

    /// The time derivative of a definition.
    fn rates(&self, k: &Known) -> Vec<Completion> {
        if self.follows_prime() {
            return Vec::new();
        }
        let name = match (&k.index, self.member(k)) {
            (Some(_), None) => return Vec::new(),
            (_, Some(member)) => member,
            _ => k.written.clone(),
        };
        let detail = format!("time derivative of {}", k.written);
        vec![plain(&format!("{name}'"), CompletionKind::Definition, &detail, k.description.clone())]
    }

    fn accelerations(&self) -> Vec<Completion> {
        if self.follows_prime() {
            return Vec::new();
        }
        let single = self.of(SymbolKind::Coordinate).filter(|k| k.index.is_none());
        single.flat_map(|k| self.derivatives(k, 2, &format!("acceleration of {}", k.written))).collect()
    }

    /// Declared indices that no sum binds yet.
    fn indices(&self) -> Vec<Completion> {
        self.of(SymbolKind::Index).map(|k| self.shown(k, k.written.clone())).collect()
    }

    /// Definitions that are numbers: they can be bounds and members.
    fn whole(&self) -> Vec<Completion> {
        let number = |k: &&Known| {
            let pieces = read(&k.value);
            !pieces.is_empty()
                && pieces.iter().all(|p| matches!(p.kind, WordKind::Number | WordKind::Sign) && p.text != ",")
        };
        let list = self.of(SymbolKind::Definition).filter(|k| !k.is_function() && k.index.is_none());
        list.filter(number).map(|k| self.shown(k, k.written.clone())).collect()
    }

    /// What a transformation can move, and does not yet.
    fn moved(&self) -> Vec<Completion> {
        let still = |name: &str| self.place.taken.iter().all(|t| t != name);
        let label = |k: &Known| match &k.index {
            Some(index) if self.model.follows != Some('[') => format!("{}[{index}]", k.written),
            _ => k.written.clone(),
        };
        let list = self.of(SymbolKind::Coordinate).filter(|k| still(&k.name));
        let mut list: Vec<Completion> = list.map(|k| self.shown(k, label(k))).collect();
        list.extend(constant("t").filter(|_| still("t")));
        list
    }

    /// Coordinates and velocities that are not given yet.
    fn state(&self) -> Vec<Completion> {
        let still = |k: &Known, order: u32| k.index.is_some() || !self.place.taken.contains(&primed(&k.name, order));
        let mut list = Vec::new();
        for k in self.of(SymbolKind::Coordinate) {
            if still(k, 0) {
                list.push(self.shown(k, k.written.clone()));
            }
            if still(k, 1) {
                list.extend(self.velocities(k));
            }
        }
        list
    }

    /// Inputs and functions that have no formula yet.
    fn signals(&self) -> Vec<Completion> {
        let list = self.of(SymbolKind::Input).chain(self.of(SymbolKind::Function));
        let list = list.filter(|k| k.index.is_some() || !self.place.taken.contains(&k.name));
        list.map(|k| self.shown(k, k.written.clone())).collect()
    }
}

/// The names that change in time: coordinates, inputs, and definitions that depend on them, directly or by others.
fn moving(known: &[Known]) -> HashSet<&str> {
    let moves = |k: &&Known| matches!(k.kind, SymbolKind::Coordinate | SymbolKind::Input);
    let mut moving: HashSet<&str> = known.iter().filter(moves).map(|k| k.name.as_str()).collect();
    moving.insert("t");
    // Each round goes one definition further; longer chains are rare.
    for _ in 0..8 {
        let before = moving.len();
        for k in known.iter().filter(|k| k.kind == SymbolKind::Definition) {
            let shadowed = |name: &String| k.formals.contains(name);
            if k.mentions.iter().any(|name| !shadowed(name) && moving.contains(name.as_str())) {
                moving.insert(&k.name);
            }
        }
        if moving.len() == before {
            break;
        }
    }
    moving
}

/// The names that stand in a text, folded.
fn mentioned(text: &str) -> impl Iterator<Item = String> {
    words(text).filter(|(_, kind)| *kind == WordKind::Word).map(|(span, _)| fold_name(&text[span.range()]))
}

/// The name with Newton's dots, where the language reads it so.
fn dotted(name: &str, order: u32) -> Option<String> {
    use unicode_normalization::UnicodeNormalization;
    let first = name.chars().next()?;
    let dots = if order == 1 { '\u{307}' } else { '\u{308}' };
    let spelt: String = format!("{first}{dots}{}", &name[first.len_utf8()..]).nfc().collect();
    (read_name(&spelt) == (fold_name(name), order)).then_some(spelt)
}
