//! Renaming: every place of a name, and the promise that the model stays the same.

use crate::checked::Checked;
use crate::database::Session;
use crate::include::Files;
use std::ops::Range;

/// What would be renamed.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Renamable {
    /// The name at the cursor without dots or primes: bytes in the file.
    pub range: Range<usize>,
    /// The name as it is now, without dots.
    pub name: String,
}

/// What can be renamed at an offset.
///
/// # Errors
/// Why nothing can, as a sentence.
pub fn prepare(checked: &Checked, offset: usize) -> Result<Renamable, String> {
    let _ = (checked, offset);
    Err("there is no name here".into())
}

impl Session {
    /// The edits of the model's own file, in order, that give the name at an offset a new one. Dots stay dots where the
    /// new name can bear them, and become primes where it can't.
    ///
    /// # Errors
    /// Why it can't be called so, as a sentence: the name is taken, reserved, no name, or would change what is found.
    pub fn rename(
        &mut self,
        checked: &Checked,
        offset: usize,
        name: &str,
        files: &dyn Files,
    ) -> Result<Vec<(Range<usize>, String)>, String> {
        let _ = (checked, offset, name, files);
        Err("there is no name here".into())
    }
}
