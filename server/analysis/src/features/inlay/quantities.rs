//! Behind a name without a declared quantity: the unit that follows from its use.

use super::{Desk, InlayKind};
use crate::scope::SymbolKind;

/// The hints of parameters, inputs and functions.
pub(super) fn hints(desk: &mut Desk<'_, '_, '_>) {
    let checked = desk.checked;
    let Some(dimensions) = &checked.dimensions else { return };
    for row in &checked.symbols {
        let declared = matches!(row.kind, SymbolKind::Parameter | SymbolKind::Input | SymbolKind::Function);
        let Some(range) = row.range.as_ref().filter(|_| declared && row.origin.is_none()) else { continue };
        let given = row.quantity.is_some() || row.value.as_ref().is_some_and(|v| v.unit.is_some());
        if given || !desk.wants(range.end) {
            continue;
        }
        let Some(form) = dimensions.form_of_name(&row.name) else { continue };
        let unit = match form.known() {
            Some(known) if known.is_one() => "dimensionless".to_owned(),
            _ => match dimensions.unit(form, None) {
                Some(unit) => unit,
                None => continue,
            },
        };
        // Behind the index of a family, the arguments of a function.
        let rest = &checked.text[range.end..];
        let mut end = range.end;
        for (open, close) in [('[', ']'), ('(', ')')] {
            let rest = &rest[end - range.end..];
            if rest.starts_with(open) {
                end += rest.find(close).map_or(0, |k| k + close.len_utf8());
            }
        }
        desk.push(end, InlayKind::Quantity, format!(": {unit}"), None);
    }
}
