//! What all parts of the server share.

use super::abilities::Abilities;
use super::documents::{Document, Documents, lock};
use super::outbox::Outbox;
use super::searches::Searches;
use super::settings::Settings;
use std::path::PathBuf;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex, OnceLock};

/// The state of the conversation.
pub struct Shared {
    /// The open documents.
    pub documents: Arc<Documents>,
    /// What is to be told without being asked.
    pub outbox: Outbox,
    /// Where searches are ordered.
    pub searches: Searches,
    /// Whether the client has said `shutdown`.
    pub shut: AtomicBool,
    abilities: OnceLock<Abilities>,
    settings: Mutex<Arc<Settings>>,
}

impl Shared {
    /// A conversation that has not begun.
    pub fn new(documents: Arc<Documents>, outbox: Outbox, searches: Searches) -> Shared {
        Shared {
            documents,
            outbox,
            searches,
            shut: AtomicBool::new(false),
            abilities: OnceLock::new(),
            settings: Mutex::default(),
        }
    }

    /// What the client can take.
    pub fn abilities(&self) -> &Abilities {
        self.abilities.get_or_init(Abilities::default)
    }

    /// Notes what the client can take, once.
    pub fn set_abilities(&self, abilities: Abilities) {
        let _ = self.abilities.set(abilities);
    }

    /// The settings.
    pub fn settings(&self) -> Arc<Settings> {
        lock(&self.settings).clone()
    }

    /// Takes new settings. Whether they differ.
    pub fn set_settings(&self, settings: Settings) -> bool {
        let mut held = lock(&self.settings);
        let differ = **held != settings;
        *held = Arc::new(settings);
        differ
    }

    /// Ends all that is being derived.
    pub fn stop(&self) {
        for document in self.documents.all() {
            document.interrupt.store(true, Ordering::Relaxed);
            document.end_search();
        }
    }

    /// Has all documents looked at anew.
    pub fn touch_all(&self) {
        self.documents.all().iter().for_each(|d| d.touch());
    }

    /// Has the documents looked at anew that take in this one.
    pub fn touch_dependents(&self, changed: &Document) {
        let mut paths = vec![PathBuf::from(&changed.path)];
        paths.extend(changed.real.clone());
        self.touch(&paths, Some(changed));
    }

    /// Has the documents looked at anew that take in one of these files from the disk.
    pub fn touch_users_of(&self, files: &[PathBuf]) {
        let mut paths = files.to_vec();
        paths.extend(files.iter().filter_map(|p| std::fs::canonicalize(p).ok()));
        self.touch(&paths, None);
    }

    fn touch(&self, paths: &[PathBuf], except: Option<&Document>) {
        let mut any = false;
        for document in self.documents.all() {
            if except.is_some_and(|e| e.uri == document.uri) {
                continue;
            }
            let hit = {
                let needed = lock(&document.needed);
                let real = |p: &PathBuf| std::fs::canonicalize(p).is_ok_and(|real| paths.contains(&real));
                needed.iter().any(|p| paths.contains(p) || real(p))
            };
            if hit {
                document.touch();
                any = true;
            }
        }
        if any {
            self.outbox.refresh();
        }
    }
}
