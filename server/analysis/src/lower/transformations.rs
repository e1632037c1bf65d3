//! Transformations: the image of each coordinate, of the time, of all members of a family.

use super::{Lowerer, Meaning, UNROLLED};
use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::scope::SymbolKind;
use leastwise_algebra::{Expr, Role};
use leastwise_grammar::tree::*;
use leastwise_mechanics::model::Image;

impl Lowerer<'_> {
    pub(super) fn symmetry(&mut self, arrows: &[Arrow]) -> Option<Meaning> {
        let mut images: Vec<(Image, Span)> = Vec::new();
        let mut ok = true;
        for arrow in arrows {
            for (source, target) in arrow.sources.iter().zip(&arrow.targets) {
                ok &= self.image(source, target, &mut images).is_some();
            }
        }
        if !ok {
            return None;
        }
        Some(Meaning::Symmetry(images))
    }

    /// The image of one coordinate, of `t`, or of all members of a family.
    fn image(&mut self, source: &Formula, target: &Formula, images: &mut Vec<(Image, Span)>) -> Option<()> {
        let (base, index) = match &source.kind {
            FormulaKind::Index { base, indices } if indices.len() == 1 => (&**base, Some(&indices[0])),
            FormulaKind::Paren(inner) => return self.image(inner, target, images),
            _ => (source, None),
        };
        let FormulaKind::Name(name) = &base.kind else {
            self.failed = true;
            return None;
        };
        if name == "t" && index.is_none() {
            let t = leastwise_mechanics::model::time(self.arena);
            let t = self.arena.sym(t);
            return self.push_image(t, source, target, images);
        }
        let decl = self.scope.get(name)?;
        if decl.kind == SymbolKind::Undeclared || decl.failed {
            self.failed = true;
            return None;
        }
        if decl.kind != SymbolKind::Coordinate {
            let message =
                format!("`{name}` is {}: a transformation changes coordinates and the time", decl.kind.described());
            let finding = LocalFinding::error(codes::NOT_A_COORDINATE, source.span, message)
                .help("what is made from coordinates changes with them")
                .related(Place::Declaration(decl.name.clone()), format!("`{name}` is declared here"));
            self.report(finding);
            return None;
        }
        // A free index: all members. For a large family the image holds at the family's own index.
        let free = index.and_then(|i| match &i.kind {
            FormulaKind::Name(n) if self.scope.get(n).is_some_and(|d| d.kind == SymbolKind::Index) => Some(n),
            _ => None,
        });
        let (Some(free), Some((lower, upper)), Some(own)) = (free, decl.range, &decl.index) else {
            let e = self.lower(source).scalar()?;
            return self.push_image(e, source, target, images);
        };
        let (a, b) = self.scope.get(free).and_then(|d| d.range)?;
        if a < lower || b > upper {
            let message = format!("`{free}` runs from {a} to {b}, the index of `{name}` from {lower} to {upper}");
            let place = Place::Declaration(decl.name.clone());
            self.report(
                LocalFinding::error(codes::INDEX_OUT_OF_RANGE, source.span, message)
                    .related(place, format!("`{name}` is declared here")),
            );
            return None;
        }
        if upper - lower < UNROLLED {
            for k in a..=b {
                self.with_index(free, k, |l| {
                    let e = l.lower(source).scalar()?;
                    l.push_image(e, source, target, images)
                })?;
            }
            return Some(());
        }
        if (a, b) != (lower, upper) {
            let message = format!("a transformation of a family of more than {UNROLLED} members changes all of them");
            self.error(codes::TOO_LARGE, source.span, message);
            return None;
        }
        let symbol = self.arena.symbol(&own.text, None, Role::Index);
        let e = self.arena.sym(symbol);
        let bounds = (self.arena.integer(lower), self.arena.integer(upper));
        self.with_open(free, e, bounds, |l| {
            let e = l.lower(source).scalar()?;
            l.push_image(e, source, target, images)
        })
    }

    fn push_image(
        &mut self,
        e: Expr,
        source: &Formula,
        target: &Formula,
        images: &mut Vec<(Image, Span)>,
    ) -> Option<()> {
        if let Some((_, first)) = images.iter().find(|(image, _)| image.source == e) {
            let first = *first;
            let finding = LocalFinding::error(codes::TRANSFORMED_TWICE, source.span, "this is transformed twice")
                .help("a transformation names each coordinate once")
                .related(Place::Here(first), "here first");
            self.report(finding);
            return None;
        }
        let target = self.scalar(target, "the image of a coordinate")?;
        images.push((Image { source: e, target }, source.span));
        Some(())
    }
}
