//! The sheet: everything derived, printed.

use crate::checked::Checked;
use crate::derive::{Derived, total};
use crate::dimensions::Dimensions;
use crate::formula::Prints;
use crate::insights::{Insights, insights};
use crate::report::{
    Answer, BreakerRow, ConservedRow, CoordinateRow, EnergyRow, Formula, MassEntry, Members, Sheet, Status,
    SymmetryRow, TermRow,
};
use leastwise_algebra::{Arena, Budget, Expr, Node, Rational, Stopped, Verdict, Witness, ZeroTest};
use leastwise_mechanics::context::{Context, Memory, Parts};
use leastwise_mechanics::energy::is_total_energy;
use leastwise_mechanics::forms::{aligned, at_member};
use leastwise_mechanics::lagrange::{self, FormParts, signed_parts};
use leastwise_mechanics::mass::{mass_rows, sparse_mass_matrix};
use leastwise_mechanics::model::{Coordinate, Model, TermKind};
use leastwise_mechanics::symmetry;

/// Beyond so many coordinates the mass matrix is listed entry by entry.
const MAX_DENSE: usize = 64;

/// What a sheet is made with.
pub(crate) struct Maker<'a> {
    pub arena: &'a mut Arena,
    pub zero: &'a mut ZeroTest,
    pub memory: &'a mut Memory,
    pub prints: &'a mut Prints,
    pub budget: &'a mut Budget,
    /// The dimensions of the model's names, where it speaks of quantities.
    pub dimensions: Option<&'a Dimensions>,
}

impl Maker<'_> {
    pub fn cx(&mut self) -> Context<'_> {
        Context { arena: self.arena, zero: self.zero, budget: self.budget, memory: self.memory }
    }

    pub fn print(&mut self, e: Expr) -> Formula {
        self.print_as(e, None)
    }

    /// The same of a quantity that has a name of its own among those of its dimension.
    fn print_as(&mut self, e: Expr, hint: Option<&str>) -> Formula {
        let measured = self.dimensions.and_then(|d| d.measured(self.arena, e, hint));
        Formula { measured, ..self.prints.formula(self.arena, e) }
    }

    fn print_parts(&mut self, parts: &Parts) -> Formula {
        let e = total(self.arena, parts);
        self.print(e)
    }

    /// The verdict in words, with the witness for what is being denied.
    pub fn answer(&mut self, of: Expr, verdict: &Verdict) -> Answer {
        match verdict {
            Verdict::Proved => Answer::Yes,
            Verdict::Refuted(w) => Answer::No(w.as_ref().map(|w| self.witness(of, w))),
            Verdict::Undecided(r) => Answer::Undecided(r.to_string()),
        }
    }

    /// An expression with the atoms on which a rate depends along motions: for accelerations stands what the equations of
    /// motion make of them. A witness has no values of its own for accelerations.
    pub fn along_motions(&mut self, model: &Model, rate: Expr) -> Expr {
        let mut atoms = self.arena.atoms(rate);
        let (mut at, mut solved) = (0, Vec::new());
        while let Some(&atom) = atoms.get(at) {
            at += 1;
            let Node::Jet(symbol, order) = *self.arena.node(atom) else { continue };
            let Some(q) = model.coordinates.iter().find(|q| q.symbol == symbol && order > 1) else { continue };
            solved.push(atom);
            let Ok(equation) = lagrange::equation(&mut self.cx(), model, q) else { continue };
            for e in equation.iter().flat_map(|(forms, _)| forms.iter().map(|f| f.expr)) {
                let fresh: Vec<Expr> = self.arena.atoms(e).into_iter().filter(|a| !atoms.contains(a)).collect();
                atoms.extend(fresh);
            }
        }
        atoms.retain(|a| !solved.contains(a));
        self.arena.sum(&atoms)
    }

    fn witness(&mut self, of: Expr, w: &Witness) -> String {
        let values: Vec<String> = self
            .zero
            .witness_values(self.arena, of, w)
            .into_iter()
            .map(|(atom, value)| format!("{} = {value}", self.prints.text(self.arena, atom)))
            .collect();
        let middle = 0.5 * (w.lower + w.upper);
        if values.is_empty() { format!("{middle:.6}") } else { format!("{middle:.6} at {}", values.join(", ")) }
    }

    /// Makes the sheet. Errors: [`Stopped`] where even single parts are too large to be derived.
    pub fn make(&mut self, checked: &Checked, derived: &Derived) -> Result<Sheet, Stopped> {
        let model = checked.model();
        let answers = derived.answers.as_ref().map_err(|s| *s)?;
        let terms = self.terms(model);
        let lagrangian = lagrange::lagrangian(&mut self.cx(), model)?;
        let lagrangian = self.print(lagrangian);
        let mut coordinates = Vec::new();
        for (i, q) in model.coordinates.iter().enumerate() {
            let verdict = &answers.cyclic[i];
            self.coordinate_rows(checked, model, q, verdict, &mut coordinates)?;
        }
        let large = model.coordinates.iter().any(|q| q.members.is_some());
        let (mut matrix, mut entries) = (Vec::new(), Vec::new());
        if large {
            entries = self.sparse_matrix(model)?;
        } else {
            let rows = mass_rows(&mut self.cx(), model)?;
            let n = rows.len();
            if n <= MAX_DENSE {
                let zero = self.print(Arena::ZERO);
                for row in rows {
                    let mut line = vec![zero.clone(); n];
                    for (j, parts) in row {
                        line[j] = self.print_parts(&parts);
                    }
                    matrix.push(line);
                }
            } else {
                for (i, row) in rows.into_iter().enumerate() {
                    for (j, parts) in row {
                        let (row, column) =
                            (model.coordinates[i].label(self.arena), model.coordinates[j].label(self.arena));
                        entries.push(MassEntry { row, column, formula: self.print_parts(&parts) });
                    }
                }
            }
        }
        let energy = self.energy(model, answers)?;
        let mut symmetries = Vec::new();
        for (claim, answer) in checked.symmetries().iter().zip(&derived.symmetries) {
            // A claim without a generator has its own finding and no row.
            if let Ok(answer) = answer {
                symmetries.push(self.symmetry(model, claim, answer)?);
            }
        }
        let mut conserved = Vec::new();
        for (k, (claim, answer)) in checked.conserved().iter().zip(&derived.conserved).enumerate() {
            let formula = self.print(claim.expr);
            let (holds, rate) = match answer {
                Ok(c) => {
                    let holds = match &c.verdict {
                        // A verdict taken from a known charge has that one's witness.
                        Ok(Verdict::Refuted(_)) if !model.constraints.is_empty() || answers.rows.is_none() => {
                            Answer::No(None)
                        }
                        Ok(v) => {
                            let of = self.along_motions(model, c.rate);
                            self.answer(of, v)
                        }
                        Err(reason) => Answer::Undecided(reason.to_string()),
                    };
                    let rate = if holds == Answer::Yes { Arena::ZERO } else { c.rate };
                    (holds, self.print(rate))
                }
                Err(s) => (Answer::Undecided(s.to_string()), self.print(Arena::UNDEFINED)),
            };
            let origin = crate::amends::origin(self, checked, derived, k);
            let (name, range) = (claim.name.clone(), claim.range.clone());
            conserved.push(ConservedRow { name, formula, holds, rate, origin, range });
        }
        Ok(Sheet {
            system: checked.system_name(),
            description: checked.description(),
            lagrangian,
            terms,
            coordinates,
            mass_matrix: matrix,
            mass_entries: entries,
            energy,
            symmetries,
            conserved,
            found: None,
            insights: insights(self, checked, derived),
        })
    }

    fn terms(&mut self, model: &Model) -> Vec<TermRow> {
        let rows = model.terms.iter().map(|t| {
            let parts: Parts = t.parts.iter().map(|&p| (p, Rational::ONE)).collect();
            TermRow { name: t.name.clone(), kind: kind_name(t.kind), formula: self.print_parts(&parts) }
        });
        rows.collect()
    }

    /// What can be said of a model that is too large to be derived.
    pub fn terms_only(&mut self, checked: &Checked) -> Sheet {
        let nothing = self.print(Arena::UNDEFINED);
        let energy = EnergyRow {
            formula: nothing.clone(),
            conserved: Answer::Undecided(Stopped::TooLarge.to_string()),
            rate: nothing.clone(),
            is_total_energy: false,
        };
        Sheet {
            system: checked.system_name(),
            description: checked.description(),
            lagrangian: nothing,
            terms: self.terms(checked.model()),
            coordinates: Vec::new(),
            mass_matrix: Vec::new(),
            mass_entries: Vec::new(),
            energy,
            symmetries: Vec::new(),
            conserved: Vec::new(),
            found: None,
            insights: Insights::default(),
        }
    }

    fn coordinate_rows(
        &mut self,
        checked: &Checked,
        model: &Model,
        q: &Coordinate,
        verdict: &leastwise_mechanics::verdicts::Cyclic,
        out: &mut Vec<CoordinateRow>,
    ) -> Result<(), Stopped> {
        let signed = signed_parts(model);
        let all: Parts = signed.concat();
        let mut lists: Vec<FormParts> = Vec::new();
        let mut cx = self.cx();
        lists.push(lagrange::momentum(&mut cx, &all, q)?);
        lists.push(lagrange::force(&mut cx, &all, q)?);
        lists.push(lagrange::equation(&mut cx, model, q)?);
        let mut names = Vec::new();
        for (t, parts) in model.terms.iter().zip(&signed) {
            lists.push(lagrange::residual(&mut cx, parts, q)?);
            names.push(t.name.clone());
        }
        for f in &model.forces {
            let minus: FormParts =
                lagrange::generalised(&mut cx, f, q)?.into_iter().map(|(forms, c)| (forms, c.neg())).collect();
            lists.push(minus);
            names.push(f.name.clone());
        }
        let reaction = !model.constraints.is_empty();
        if reaction {
            lists.push(lagrange::reaction(&mut cx, model, q)?);
        }
        let (ranges, rows) = aligned(cx.arena, q, &lists, cx.budget)?;
        for (k, range) in ranges.iter().enumerate() {
            let at = |i: usize| rows[i][k];
            // What acts on an angle is a torque.
            let angle = matches!(checked.quantity_of(q.symbol).as_deref(), Some("angle" | "twist"));
            let act = angle.then_some("torque");
            let by_term = names
                .iter()
                .enumerate()
                .filter(|(n, _)| at(3 + n) != Arena::ZERO)
                .map(|(n, name)| (name.clone(), self.print_as(at(3 + n), act)))
                .collect();
            let (name, members) = match (range, q.members) {
                (Some((a, b)), Some(_)) if a == b => (format!("{}[{a}]", self.arena.name(q.symbol)), None),
                (Some((a, b)), Some(m)) => {
                    (q.label(self.arena), Some(Members { index: self.arena.name(m.index), range: (*a, *b) }))
                }
                _ => (q.label(self.arena), None),
            };
            let cyclic = match range {
                // On a part of a family it may be cyclic though not on all.
                Some(_) => at(1) == Arena::ZERO || verdict.cyclic.is_proved(),
                None => verdict.cyclic.is_proved(),
            };
            out.push(CoordinateRow {
                name,
                members,
                quantity: checked.quantity_of(q.symbol),
                cyclic,
                cyclic_undecided: match &verdict.cyclic {
                    Verdict::Undecided(r) => Some(r.to_string()),
                    _ => None,
                },
                momentum_conserved: verdict.momentum.is_proved() && !reaction,
                momentum: self.print(at(0)),
                force: self.print_as(if cyclic { Arena::ZERO } else { at(1) }, act),
                equation: self.print_as(at(2), act),
                reaction: reaction.then(|| self.print_as(at(3 + names.len()), act)),
                by_term,
            });
        }
        Ok(())
    }

    fn sparse_matrix(&mut self, model: &Model) -> Result<Vec<MassEntry>, Stopped> {
        let mut out = Vec::new();
        let rows = sparse_mass_matrix(&mut self.cx(), model)?;
        for row in rows {
            let q = &model.coordinates[row.coordinate];
            let name = match (row.range, q.members) {
                (Some((a, b)), Some(_)) if a == b => format!("{}[{a}]", self.arena.name(q.symbol)),
                _ => q.label(self.arena),
            };
            for (velocity, entry) in row.entries {
                let mut column = velocity;
                if let (Some((a, b)), Some(m)) = (row.range, q.members)
                    && a == b
                {
                    column = at_member(self.arena, velocity, m.index, a, self.budget)?;
                }
                let column = self.print(column).plain.replace('\'', "");
                out.push(MassEntry { row: name.clone(), column, formula: self.print(entry) });
            }
        }
        Ok(out)
    }

    fn energy(
        &mut self,
        model: &Model,
        answers: &leastwise_mechanics::verdicts::Answers,
    ) -> Result<EnergyRow, Stopped> {
        let e = &answers.energy;
        let total_energy = is_total_energy(&mut self.cx(), model, e.function);
        let rate = total(self.arena, &e.rate);
        let conserved = match &answers.energy_conserved {
            Ok(v) => self.answer(rate, v),
            Err(reason) => Answer::Undecided(reason.to_string()),
        };
        let rate = if conserved == Answer::Yes { Arena::ZERO } else { rate };
        Ok(EnergyRow {
            formula: self.print(e.function),
            conserved,
            rate: self.print(rate),
            is_total_energy: total_energy.is_proved(),
        })
    }

    fn symmetry(
        &mut self,
        model: &Model,
        claim: &crate::checked::SymmetryClaim,
        a: &leastwise_mechanics::verdicts::SymmetryAnswer,
    ) -> Result<SymmetryRow, Stopped> {
        let g = &a.symmetry.generator;
        let mut generator = vec![("t".to_string(), self.print(g.tau))];
        for (q, eta) in model.coordinates.iter().zip(&g.eta) {
            if *eta != Arena::ZERO {
                generator.push((q.label(self.arena), self.print(*eta)));
            }
        }
        let (status, undecided) = match &a.symmetry.status {
            symmetry::Status::Exact => (Status::Exact, None),
            symmetry::Status::UpToGauge => (Status::UpToGauge, None),
            symmetry::Status::Broken => (Status::Broken, None),
            symmetry::Status::Undecided(r) => (Status::Undecided, Some(r.clone())),
        };
        let broken_by = a
            .culprits
            .iter()
            .map(|c| BreakerRow {
                term: model.terms[c.term].name.clone(),
                variation: self.print_parts(&a.symmetry.variations[c.term]),
            })
            .collect();
        let rate = total(self.arena, &a.rate);
        let conserved = match &a.conserved {
            Ok(v) => self.answer(rate, v),
            Err(r) => Answer::Undecided(r.to_string()),
        };
        let rate = if conserved == Answer::Yes { Arena::ZERO } else { rate };
        let taken_by = model
            .forces
            .iter()
            .zip(&a.taken)
            .filter(|(_, e)| **e != Arena::ZERO)
            .map(|(f, _)| f.name.clone())
            .collect();
        Ok(SymmetryRow {
            name: claim.name.clone(),
            expected_broken: claim.expected_broken,
            status,
            undecided,
            generator,
            charge: self.print(a.charge),
            gauge: a.gauge.map(|f| self.print(f)),
            gauge_unknown: a.gauge_unknown.then(|| "it exists, but no closed form was found".to_string()),
            rate: self.print(rate),
            conserved,
            broken_by,
            smallest: a.smallest,
            taken_by,
            respects_constraints: a.respects_constraints,
            range: claim.range.clone(),
        })
    }
}

pub(crate) fn kind_name(kind: TermKind) -> &'static str {
    match kind {
        TermKind::Kinetic => "kinetic",
        TermKind::Potential => "potential",
        TermKind::Lagrangian => "lagrangian",
    }
}
