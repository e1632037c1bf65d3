//! The files that models include, as the editor has them: an open document comes before the disk.

use super::documents::{Documents, lock};
use crate::files::{Content, Disk, decode, read};
use leastwise_analysis::Files;
use std::collections::HashSet;
use std::path::{Path, PathBuf};
use std::sync::{Arc, Mutex};

/// Reads included files for one document, and notes which were looked for.
pub struct Overlay {
    documents: Arc<Documents>,
    disk: Disk,
    needed: Mutex<HashSet<PathBuf>>,
}

impl Overlay {
    /// Nothing looked for yet.
    pub fn new(documents: Arc<Documents>) -> Overlay {
        Overlay { documents, disk: Disk::default(), needed: Mutex::default() }
    }

    /// The files that were looked for since the last call, there or not.
    pub fn take_needed(&self) -> HashSet<PathBuf> {
        std::mem::take(&mut lock(&self.needed))
    }

    /// The text of a file.
    ///
    /// # Errors
    /// Why it cannot be read.
    pub fn text(&self, path: &Path) -> Result<Arc<str>, String> {
        if let Some(document) = self.documents.of_file(path) {
            return Ok(document.snapshot().text);
        }
        match decode(read(path)?) {
            Content::Text(text) => Ok(text.into()),
            Content::Broken(broken) => Err(broken.message),
        }
    }
}

impl Files for Overlay {
    fn read(&self, from: &str, include: &str) -> Result<(String, String), String> {
        if !Path::new(from).is_absolute() {
            return Err("this model is not saved yet, and files are found beside it".to_string());
        }
        let path = self.disk.resolve(from, include)?;
        lock(&self.needed).insert(path.clone());
        let text = self.text(&path)?;
        Ok((self.disk.show(&path), text.to_string()))
    }
}
