//! The quantity of the smallest formula under the cursor.

use super::writer::{Writer, written};
use crate::features::place::item_at;

/// Says what the formula around an offset is: its quantity and unit.
pub(super) fn quantity(w: &mut Writer<'_, '_>, offset: usize) {
    let Some(dimensions) = &w.checked.dimensions else { return };
    let Some(item) = item_at(w.checked, offset) else { return };
    let row = &w.checked.items[item];
    let Some((span, form)) = dimensions.at(item, offset - row.range.start) else { return };
    let text = written(w.checked, item, span);
    let hint = w.checked.symbol(&text).and_then(|s| s.quantity.as_deref());
    let words = dimensions.words(form, hint);
    w.prose(format!("`{text}` is {words}."));
}
