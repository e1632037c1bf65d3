//! The quantity of the smallest formula under the cursor.

use super::writer::{Writer, written};
use crate::features::place::item_at;

/// What the formula around an offset is: its quantity and unit.
pub(super) fn quantity(w: &Writer<'_, '_>, offset: usize) -> Option<String> {
    let dimensions = w.checked.dimensions.as_ref()?;
    let item = item_at(w.checked, offset)?;
    let (span, form) = dimensions.at(item, offset.checked_sub(w.checked.items[item].range.start)?)?;
    let text = written(w.checked, item, span);
    let declared = w.checked.symbols.iter().find(|s| *s.name == *text);
    // Its declaration says it already.
    if declared.is_some_and(|s| s.quantity.is_some()) {
        return None;
    }
    let words = dimensions.words(&form, None);
    Some(format!("`{text}` is {words}."))
}
