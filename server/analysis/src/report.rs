//! What the analysis says, as plain data: findings and the sheet. Knows no protocol and no JSON.

use crate::insights::Insights;
use crate::search::SearchReport;
use leastwise_grammar::tree::Severity;
use std::ops::Range;

/// A formula in its three printed forms.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Formula {
    /// Unicode, as in hovers and on a terminal.
    pub text: String,
    /// ASCII operators, explicit `*`; parses back.
    pub plain: String,
    /// LaTeX, without delimiters.
    pub latex: String,
    /// What it is, where quantities are declared and it is known.
    pub measured: Option<Measured>,
}

/// A quantity and a fitting unit.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Measured {
    /// The name of a quantity of this dimension, where there is one.
    pub quantity: Option<String>,
    /// A coherent unit: `N·m`; `1` for a number.
    pub unit: String,
}

/// A second place that explains a finding.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Related {
    /// Byte range in the file.
    pub range: Range<usize>,
    /// What is there.
    pub message: String,
}

/// A replacement of texts that mends a finding.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Fix {
    /// What it does, in the imperative.
    pub title: String,
    /// Byte ranges in the file and their new texts, in order, not overlapping.
    pub edits: Vec<(Range<usize>, String)>,
}

/// A finding in one file.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Finding {
    /// A stable kebab-case code; each has an entry in the table of codes.
    pub code: &'static str,
    /// How grave.
    pub severity: Severity,
    /// One sentence or two, without a full stop at the end.
    pub message: String,
    /// What to do, where there is one thing to say.
    pub help: Option<String>,
    /// Byte range in the file.
    pub range: Range<usize>,
    /// Other places.
    pub related: Vec<Related>,
    /// Mends, best first.
    pub fixes: Vec<Fix>,
}

/// The answer to a yes-or-no question about a model.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Answer {
    /// Proved true.
    Yes,
    /// Proved false; a witness in words (`at x = 1/2, ẋ = 3/4: 0.28`) where there is one.
    No(Option<String>),
    /// Not decided, for this reason.
    Undecided(String),
}

/// A term of the Lagrangian.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct TermRow {
    /// Its name; numbered where the model gives none.
    pub name: String,
    /// `kinetic`, `potential` or `lagrangian`.
    pub kind: &'static str,
    /// As written: U for a potential.
    pub formula: Formula,
}

/// The members of a family for which one form holds.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Members {
    /// The index's name in the forms.
    pub index: String,
    /// First and last member, both included.
    pub range: (i64, i64),
}

/// What is derived for a coordinate, or for some members of a large family.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct CoordinateRow {
    /// Its name; `x[i]` for members of a large family.
    pub name: String,
    /// Which members, for a family of more than 64.
    pub members: Option<Members>,
    /// The quantity as declared.
    pub quantity: Option<String>,
    /// Whether ∂L/∂q vanishes identically.
    pub cyclic: bool,
    /// Why `cyclic` is not decided.
    pub cyclic_undecided: Option<String>,
    /// Whether its momentum is conserved, forces included.
    pub momentum_conserved: bool,
    /// ∂L/∂q̇.
    pub momentum: Formula,
    /// ∂L/∂q.
    pub force: Formula,
    /// d/dt ∂L/∂q̇ − ∂L/∂q − 𝒬.
    pub equation: Formula,
    /// Σ λₐ aₐᵢ, where there are constraints.
    pub reaction: Option<Formula>,
    /// What each term adds to the equation, by name; only nonzero ones.
    pub by_term: Vec<(String, Formula)>,
}

/// The energy function h = Σ p q̇ − L.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct EnergyRow {
    /// h.
    pub formula: Formula,
    /// Whether it is conserved.
    pub conserved: Answer,
    /// dh/dt along motions.
    pub rate: Formula,
    /// Whether h is kinetic + potential.
    pub is_total_energy: bool,
}

/// A term's share in the breaking of a symmetry.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct BreakerRow {
    /// The term.
    pub term: String,
    /// Its variation.
    pub variation: Formula,
}

/// The verdict on a symmetry of the Lagrangian.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Status {
    /// The variation vanishes identically.
    Exact,
    /// The variation is a total time derivative.
    UpToGauge,
    /// Neither.
    Broken,
    /// Not decided.
    Undecided,
}

/// A symmetry claim and its verdict.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct SymmetryRow {
    /// The claim's name.
    pub name: String,
    /// Whether it is declared `broken symmetry`.
    pub expected_broken: bool,
    /// The verdict.
    pub status: Status,
    /// Why it is undecided.
    pub undecided: Option<String>,
    /// τ first (`t`), then η for each coordinate it moves.
    pub generator: Vec<(String, Formula)>,
    /// The charge.
    pub charge: Formula,
    /// F with V = dF/dt, where it is not zero.
    pub gauge: Option<Formula>,
    /// Why no closed form of F is given though it exists.
    pub gauge_unknown: Option<String>,
    /// dQ/dt along motions: the right side of the balance law.
    pub rate: Formula,
    /// Whether the charge is conserved along motions.
    pub conserved: Answer,
    /// The terms to blame.
    pub broken_by: Vec<BreakerRow>,
    /// Whether `broken_by` is a smallest set, or only minimal by inclusion.
    pub smallest: bool,
    /// Forces, dampings that change the charge.
    pub taken_by: Vec<String>,
    /// Whether the flow preserves the constraints, where there are any and it is decided.
    pub respects_constraints: Option<bool>,
    /// Where the claim stands: byte range in the file.
    pub range: Range<usize>,
}

/// A claimed constant of the motion and its verdict.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct ConservedRow {
    /// The claim's name.
    pub name: String,
    /// The claimed constant.
    pub formula: Formula,
    /// Whether it is constant along motions.
    pub holds: Answer,
    /// Its rate, accelerations as they stand; 0 where it is conserved.
    pub rate: Formula,
    /// What symmetry a conserved one comes from, in words; empty where that is not told.
    pub origin: String,
    /// Where the claim stands: byte range in the file.
    pub range: Range<usize>,
}

/// Entry of a sparse mass matrix of large families, or of the full one.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct MassEntry {
    /// Row: a coordinate's name (`x[i]`).
    pub row: String,
    /// Column (`x[i + 1]`).
    pub column: String,
    /// The entry.
    pub formula: Formula,
}

/// All that was derived of a model.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Sheet {
    /// The system's name, or the file's stem.
    pub system: String,
    /// The description above `system`.
    pub description: Option<String>,
    /// L.
    pub lagrangian: Formula,
    /// Its terms.
    pub terms: Vec<TermRow>,
    /// Its coordinates.
    pub coordinates: Vec<CoordinateRow>,
    /// The mass matrix, row by row; empty for models with large families.
    pub mass_matrix: Vec<Vec<Formula>>,
    /// The entries that are not zero, for models with large families.
    pub mass_entries: Vec<MassEntry>,
    /// The energy function.
    pub energy: EnergyRow,
    /// Symmetry claims.
    pub symmetries: Vec<SymmetryRow>,
    /// Claimed constants.
    pub conserved: Vec<ConservedRow>,
    /// What a search found, where there was one.
    pub found: Option<SearchReport>,
    /// The algebra of the charges, discrete symmetries, similarity, idle terms.
    pub insights: Insights,
}
