//! A model after reading: its symbols, its meaning for the mechanics with the place of everything, and what was found.
//! Plain data; expressions belong to the session's arena of the same epoch.

use crate::report::Finding;
use crate::scope::{Parsed, SymbolKind};
use crate::values::Value;
use leastwise_algebra::{Expr, Relation, Symbol};
use leastwise_grammar::tree::UnitText;
use leastwise_mechanics::model::{Image, Model};
use std::ops::Range;
use std::sync::Arc;

/// A checked model. Cheap to clone.
#[derive(Clone)]
pub struct Checked(pub(crate) Arc<Contents>);

/// What a checked model holds.
pub struct Contents {
    /// The model's path.
    pub path: Arc<str>,
    /// The model's text.
    pub text: Arc<str>,
    /// The epoch of the arena that the expressions belong to.
    pub epoch: u64,
    /// The items of the model's own file in order.
    pub items: Vec<ItemRow>,
    /// The files that are included, by where the `include` begins.
    pub included: Vec<(usize, Arc<str>)>,
    /// All names.
    pub symbols: Vec<SymbolRow>,
    /// The model for the mechanics.
    pub model: Model,
    /// The places of the model's coordinates, in its order.
    pub coordinates: Vec<CoordinatePlace>,
    /// The places of the model's terms, in its order.
    pub terms: Vec<TermPlace>,
    /// The places of the model's forces, in its order.
    pub forces: Vec<TermPlace>,
    /// The places of the model's constraints, in its order.
    pub constraints: Vec<Range<usize>>,
    /// What may be taken for granted: differences compared with zero.
    pub assumptions: Vec<(Expr, Relation)>,
    /// Symmetry claims.
    pub symmetries: Vec<SymmetryClaim>,
    /// Claimed constants.
    pub conserved: Vec<ConservedClaim>,
    /// Runs.
    pub runs: Vec<Run>,
    /// The `system` item.
    pub system: Option<System>,
    /// What was found, in the order of the file.
    pub findings: Vec<Finding>,
    /// The dimensions of names and formulas, where the model speaks of quantities.
    pub(crate) dimensions: Option<crate::dimensions::Dimensions>,
    /// Whether every item has its meaning; else verdicts hold for what is left of the model.
    pub complete: bool,
}

/// An item in its file.
#[derive(Clone, Debug)]
pub struct ItemRow {
    /// Bytes in the file.
    pub range: Range<usize>,
    /// What it says.
    pub parsed: Arc<Parsed>,
    /// The comment that describes it.
    pub description: Option<Arc<str>>,
    /// Whether it has no meaning because something is wrong in it.
    pub failed: bool,
}

/// A name and what is known of it.
#[derive(Clone, Debug)]
pub struct SymbolRow {
    /// The folded name.
    pub name: Arc<str>,
    /// What it is.
    pub kind: SymbolKind,
    /// Where it is declared: bytes in the model's file; `None` for names of other files and undeclared ones.
    pub range: Option<Range<usize>>,
    /// The item of the model's file that declares it.
    pub item: Option<usize>,
    /// The included file that declares it, with the place of the name there.
    pub origin: Option<(Arc<str>, Range<usize>)>,
    /// The comment that describes it.
    pub description: Option<String>,
    /// The quantity or unit as declared.
    pub quantity: Option<String>,
    /// A parameter's value: one number, or one for each member of a family.
    pub value: Option<ParameterValue>,
    /// The index of a family.
    pub index: Option<Arc<str>>,
    /// First and last member of a family; of an index, its range.
    pub members: Option<(i64, i64)>,
    /// Formal arguments of a function.
    pub formals: Vec<Arc<str>>,
    /// The value of a plain definition, all definitions in it expanded.
    pub(crate) definition: Option<Value>,
    /// Every place in the model's file where it is used.
    pub uses: Vec<Range<usize>>,
}

/// The value of a parameter.
#[derive(Clone, PartialEq, Debug)]
pub struct ParameterValue {
    /// The numbers in the unit.
    pub numbers: Vec<Expr>,
    /// The unit.
    pub unit: Option<UnitText>,
}

/// Where a coordinate stands and what is claimed of it.
#[derive(Clone, Debug)]
pub struct CoordinatePlace {
    /// Its symbol, or its family's.
    pub symbol: Symbol,
    /// Its name where it is declared.
    pub range: Range<usize>,
    /// Its quantity as declared.
    pub quantity: Option<String>,
    /// Whether it is claimed cyclic.
    pub cyclic: bool,
    /// Whether it is an angle that is the same after a full turn.
    pub angle: bool,
}

/// Where a term or force stands.
#[derive(Clone, Debug)]
pub struct TermPlace {
    /// The whole item.
    pub range: Range<usize>,
    /// Its keyword.
    pub keyword: Range<usize>,
    /// Its name, where it has one.
    pub name: Option<Range<usize>>,
    /// Its formula.
    pub body: Range<usize>,
    /// The additive parts, as many as in the model.
    pub parts: Vec<Range<usize>>,
    /// The comment that describes it.
    pub description: Option<Arc<str>>,
}

/// A claimed symmetry.
#[derive(Clone, Debug)]
pub struct SymmetryClaim {
    /// Its name; numbered where the model gives none.
    pub name: String,
    /// Whether it is declared broken.
    pub expected_broken: bool,
    /// What it does.
    pub images: Vec<Image>,
    /// Where each image stands, as many as `images`.
    pub image_ranges: Vec<Range<usize>>,
    /// The item.
    pub range: Range<usize>,
    /// Where its keyword begins.
    pub keyword_start: Option<usize>,
    /// The comment that describes it.
    pub description: Option<Arc<str>>,
}

/// A claimed constant of the motion.
#[derive(Clone, Debug)]
pub struct ConservedClaim {
    /// Its name; numbered where the model gives none.
    pub name: String,
    /// The claimed constant.
    pub expr: Expr,
    /// Its additive parts with their places.
    pub parts: Vec<(Expr, Range<usize>)>,
    /// The item.
    pub range: Range<usize>,
    /// The comment that describes it.
    pub description: Option<Arc<str>>,
}

/// A number with its unit.
#[derive(Clone, PartialEq, Debug)]
pub struct Measure {
    /// The number in the unit.
    pub number: Expr,
    /// The unit.
    pub unit: Option<UnitText>,
}

/// A run.
#[derive(Clone, Debug)]
pub struct Run {
    /// Its name; numbered where the model gives none.
    pub name: String,
    /// Initial values of coordinates and velocities.
    pub from: Vec<(Expr, Measure)>,
    /// How long.
    pub over: Option<Measure>,
    /// Ends when this comparison with zero becomes true.
    pub until: Option<(Expr, Relation)>,
    /// Formulas of inputs, and of functions at their formal arguments.
    pub with: Vec<(Expr, Expr)>,
    /// The item.
    pub range: Range<usize>,
}

/// The `system` item.
#[derive(Clone, PartialEq, Debug)]
pub struct System {
    /// The model's name.
    pub name: String,
    /// Where the name stands.
    pub range: Range<usize>,
    /// The comment that describes it.
    pub description: Option<String>,
    /// Whether quantities are switched off.
    pub dimensionless: bool,
    /// The constants set to one.
    pub unity: Vec<String>,
}

impl std::ops::Deref for Checked {
    type Target = Contents;

    fn deref(&self) -> &Contents {
        &self.0
    }
}

impl Contents {
    /// The model for the mechanics.
    pub fn model(&self) -> &Model {
        &self.model
    }

    /// Symmetry claims in the order of the file.
    pub fn symmetries(&self) -> &[SymmetryClaim] {
        &self.symmetries
    }

    /// Claimed constants in the order of the file.
    pub fn conserved(&self) -> &[ConservedClaim] {
        &self.conserved
    }

    /// What may be taken for granted: differences compared with zero.
    pub fn assumptions(&self) -> &[(Expr, Relation)] {
        &self.assumptions
    }

    /// The system's name, or the stem of the file's.
    pub fn system_name(&self) -> String {
        match &self.system {
            Some(system) => system.name.clone(),
            None => {
                let file = self.path.rsplit(['/', '\\']).next().unwrap_or_default();
                file.strip_suffix(".least").unwrap_or(file).to_owned()
            }
        }
    }

    /// The comment above `system`.
    pub fn description(&self) -> Option<String> {
        self.system.as_ref()?.description.clone()
    }

    /// Where the system is named, or where the file begins: the place of what concerns the whole model.
    pub fn system_range(&self) -> Range<usize> {
        match (&self.system, self.items.first()) {
            (Some(system), _) => system.range.clone(),
            (None, Some(item)) => {
                let keyword = item.parsed.item.keyword.range();
                item.range.start + keyword.start..item.range.start + keyword.end
            }
            (None, None) => 0..0,
        }
    }

    /// The formula of a term.
    pub fn term_range(&self, term: usize) -> Range<usize> {
        self.terms[term].body.clone()
    }

    /// An additive part of a term.
    pub fn part_range(&self, term: usize, part: usize) -> Range<usize> {
        let place = &self.terms[term];
        place.parts.get(part).unwrap_or(&place.body).clone()
    }

    /// Where a coordinate of the model is declared.
    pub fn coordinate_range(&self, coordinate: usize) -> Range<usize> {
        self.coordinates[coordinate].range.clone()
    }

    /// The coordinates claimed cyclic, with their places.
    pub fn cyclic_claims(&self) -> impl Iterator<Item = (usize, Range<usize>)> + '_ {
        let claimed = |(i, place): (usize, &CoordinatePlace)| place.cyclic.then(|| (i, place.range.clone()));
        self.coordinates.iter().enumerate().filter_map(claimed)
    }

    /// The coordinates that are the same after a full turn.
    pub fn angles(&self) -> impl Iterator<Item = usize> + '_ {
        self.coordinates.iter().enumerate().filter(|(_, place)| place.angle).map(|(i, _)| i)
    }

    /// The quantity of a coordinate as declared.
    pub fn quantity_of(&self, symbol: Symbol) -> Option<String> {
        self.coordinates.iter().find(|place| place.symbol == symbol)?.quantity.clone()
    }

    /// A name of the model.
    pub fn symbol(&self, name: &str) -> Option<&SymbolRow> {
        self.symbols.iter().find(|s| &*s.name == name)
    }
}
