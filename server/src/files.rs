//! Reading models and writing them back. Only regular files are opened, so that nothing can block or never end.

use std::collections::HashMap;
use std::ffi::OsStr;
use std::fs::{self, File};
use std::io::{self, Read, Write};
use std::path::{Component, Path, PathBuf};
use std::sync::Mutex;

/// The largest file that is read, in bytes.
pub const MAX_BYTES: u64 = 16 << 20;
/// How standard input is called in messages.
pub const STDIN: &str = "<stdin>";

/// What a file holds.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Content {
    /// Text.
    Text(String),
    /// Bytes that are not UTF-8.
    Broken(NotUtf8),
}

/// A text that cannot be read, and where.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct NotUtf8 {
    /// The text with U+FFFD in place of each bad sequence.
    pub lossy: String,
    /// The first bad byte: its offset in the file, and in `lossy`.
    pub offset: usize,
    /// What is wrong, in words.
    pub message: String,
    /// What to do.
    pub help: &'static str,
}

/// Text, or where it stops being text.
pub fn decode(bytes: Vec<u8>) -> Content {
    let wide = bytes.starts_with(&[0xff, 0xfe]) || bytes.starts_with(&[0xfe, 0xff]);
    let error = match String::from_utf8(bytes) {
        Ok(text) => return Content::Text(text),
        Err(error) => error,
    };
    let offset = error.utf8_error().valid_up_to();
    let bytes = error.into_bytes();
    let byte = bytes.get(offset).copied().unwrap_or_default();
    let (message, help) = if wide {
        ("the file is UTF-16, not UTF-8".to_string(), "save it as UTF-8")
    } else {
        (format!("not UTF-8 text: byte 0x{byte:02X} at position {offset}"), "save the file as UTF-8")
    };
    Content::Broken(NotUtf8 { lossy: String::from_utf8_lossy(&bytes).into_owned(), offset, message, help })
}

/// The bytes of a regular file of a bearable size.
///
/// # Errors
/// What is wrong, in words that follow the file's name and a colon.
pub fn read(path: &Path) -> Result<Vec<u8>, String> {
    // Asked before opening: opening a FIFO would wait for its writer.
    let regular = |m: &fs::Metadata| if m.is_file() { Ok(()) } else { Err(irregular(m)) };
    regular(&fs::metadata(path).map_err(|e| reason(&e))?)?;
    let file = File::open(path).map_err(|e| reason(&e))?;
    let metadata = file.metadata().map_err(|e| reason(&e))?;
    regular(&metadata)?;
    if metadata.len() > MAX_BYTES {
        return Err(too_large());
    }
    // No more than it said to hold: a file of a system's own may be endless, or wait.
    let mut bytes = Vec::new();
    file.take(metadata.len()).read_to_end(&mut bytes).map_err(|e| reason(&e))?;
    Ok(bytes)
}

/// The bytes of a stream of a bearable size.
///
/// # Errors
/// What is wrong, in words.
pub fn read_stream(input: &mut dyn Read) -> Result<Vec<u8>, String> {
    let mut bytes = Vec::new();
    input.take(MAX_BYTES + 1).read_to_end(&mut bytes).map_err(|e| reason(&e))?;
    if bytes.len() as u64 > MAX_BYTES { Err(too_large()) } else { Ok(bytes) }
}

fn too_large() -> String {
    format!("larger than {} MiB, the most that is read", MAX_BYTES >> 20)
}

fn irregular(metadata: &fs::Metadata) -> String {
    if metadata.is_dir() { "a folder, not a file".to_string() } else { "not a regular file".to_string() }
}

/// The reason of a failure as a sentence's end.
fn reason(error: &io::Error) -> String {
    match error.kind() {
        io::ErrorKind::NotFound => "no such file".to_string(),
        io::ErrorKind::PermissionDenied => "not permitted".to_string(),
        io::ErrorKind::NotADirectory => "no such file".to_string(),
        _ => error.to_string(),
    }
}

/// Puts a new text in place of an old one: written beside it, then renamed, so that no moment has half a file.
/// The permissions stay; a symbolic link stays a link.
///
/// # Errors
/// What is wrong, in words; the old file is then as it was.
pub fn replace(path: &Path, text: &str) -> Result<(), String> {
    let path = fs::canonicalize(path).map_err(|e| reason(&e))?;
    let metadata = fs::metadata(&path).map_err(|e| reason(&e))?;
    if metadata.permissions().readonly() {
        return Err("read-only".to_string());
    }
    let name = path.file_name().unwrap_or_else(|| OsStr::new("model"));
    let mut hidden = std::ffi::OsString::from(".");
    hidden.push(name);
    hidden.push(format!(".{}.tmp", std::process::id()));
    let beside = path.with_file_name(hidden);
    let written = (|| {
        let mut file = File::create_new(&beside)?;
        file.set_permissions(metadata.permissions())?;
        file.write_all(text.as_bytes())?;
        file.sync_all()?;
        drop(file);
        fs::rename(&beside, &path)
    })();
    written.map_err(|e| {
        // Best effort: the error that matters is the one reported.
        let _ = fs::remove_file(&beside);
        reason(&e)
    })
}

/// The files that models include, found relative to the file that names them.
#[derive(Default)]
pub struct Disk {
    /// Paths by the name under which they are shown: a name may hold bytes that are not text.
    shown: Mutex<HashMap<String, PathBuf>>,
}

impl Disk {
    /// The name under which a path is shown in messages.
    pub fn show(&self, path: &Path) -> String {
        let name = path.to_string_lossy().into_owned();
        if let Ok(mut shown) = self.shown.lock() {
            shown.insert(name.clone(), path.to_path_buf());
        }
        name
    }

    /// Where an included file is looked for.
    ///
    /// # Errors
    /// What is wrong with its name.
    pub fn resolve(&self, from: &str, include: &str) -> Result<PathBuf, String> {
        if include.is_empty() || include.contains('\0') {
            return Err("no name of a file".to_string());
        }
        let from = self.shown.lock().ok().and_then(|s| s.get(from).cloned()).unwrap_or_else(|| PathBuf::from(from));
        Ok(tidy(&from.parent().unwrap_or_else(|| Path::new("")).join(include)))
    }

    /// The included file's name and text.
    ///
    /// # Errors
    /// What is wrong, in words that follow the file's name and a colon.
    pub fn include(&self, from: &str, include: &str) -> Result<(String, String), String> {
        let path = self.resolve(from, include)?;
        let bytes = read(&path)?;
        match decode(bytes) {
            Content::Text(text) => Ok((self.show(&path), text)),
            Content::Broken(broken) => Err(broken.message),
        }
    }
}

/// The path without `.` and `name/..`, so that one file has one name and a circle of includes is seen.
fn tidy(raw: &Path) -> PathBuf {
    let mut path = PathBuf::new();
    for part in raw.components() {
        match part {
            Component::CurDir => {}
            Component::ParentDir if matches!(path.components().next_back(), Some(Component::Normal(_))) => {
                path.pop();
            }
            other => path.push(other),
        }
    }
    // Behind a symbolic link `..` leads elsewhere; then the real name is the one to use.
    match (fs::canonicalize(raw), fs::canonicalize(&path)) {
        (Ok(real), Ok(short)) if real == short => path,
        (Ok(real), _) => real,
        _ => path,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Folder(PathBuf);

    impl Folder {
        fn new(name: &str) -> Folder {
            let path = std::env::temp_dir().join(format!("leastwise-files-{name}-{}", std::process::id()));
            fs::create_dir_all(path.join("parts")).expect("a folder for the test");
            Folder(path)
        }
        fn write(&self, name: &str, bytes: &[u8]) -> PathBuf {
            let path = self.0.join(name);
            fs::write(&path, bytes).expect("a file for the test");
            path
        }
    }

    impl Drop for Folder {
        fn drop(&mut self) {
            let _ = fs::remove_dir_all(&self.0);
        }
    }

    #[test]
    fn bad_bytes_are_placed() {
        let Content::Broken(broken) = decode(b"coordinate l\xe4nge\n".to_vec()) else { panic!("not text") };
        assert_eq!(broken.offset, 12);
        assert_eq!(broken.message, "not UTF-8 text: byte 0xE4 at position 12");
        assert_eq!(&broken.lossy[12..15], "\u{fffd}");
        let Content::Broken(broken) = decode(b"\xff\xfea\0".to_vec()) else { panic!("not text") };
        assert_eq!(broken.message, "the file is UTF-16, not UTF-8");
    }

    #[test]
    fn only_regular_files_of_a_bearable_size() {
        let folder = Folder::new("kinds");
        assert_eq!(read(&folder.0), Err("a folder, not a file".to_string()));
        assert_eq!(read(&folder.0.join("none.least")), Err("no such file".to_string()));
        if cfg!(unix) {
            assert_eq!(read(Path::new("/dev/zero")), Err("not a regular file".to_string()));
        }
        let big = folder.write("big.least", b"");
        File::options().write(true).open(&big).and_then(|f| f.set_len(MAX_BYTES + 1)).expect("a long file");
        assert_eq!(read(&big), Err("larger than 16 MiB, the most that is read".to_string()));
        assert_eq!(read(&folder.write("a.least", b"kinetic")), Ok(b"kinetic".to_vec()));
    }

    #[test]
    fn an_endless_stream_is_refused() {
        assert!(read_stream(&mut io::repeat(b'#')).is_err());
    }

    #[test]
    fn includes_are_beside_the_file_that_names_them() {
        let folder = Folder::new("includes");
        folder.write("parts/site.least", b"parameter g");
        folder.write("latin.least", b"\xe4");
        let disk = Disk::default();
        let from = disk.show(&folder.0.join("model.least"));
        let (name, text) = disk.include(&from, "parts/site.least").expect("found");
        assert_eq!(text, "parameter g");
        let again = disk.include(&from, "./parts/../parts/./site.least").expect("found");
        assert_eq!(again.0, name, "one file has one name");
        let above = disk.include(&name, "../latin.least");
        assert_eq!(above, Err("not UTF-8 text: byte 0xE4 at position 0".to_string()));
        assert_eq!(disk.include(&from, "parts"), Err("a folder, not a file".to_string()));
        assert_eq!(disk.include(&from, "a\0b"), Err("no name of a file".to_string()));
        assert!(disk.include(&from, &"n".repeat(100_000)).is_err());
    }

    #[test]
    fn replacing_keeps_permissions_and_leaves_nothing_behind() {
        let folder = Folder::new("replace");
        let path = folder.write("a.least", b"old");
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            fs::set_permissions(&path, fs::Permissions::from_mode(0o640)).expect("permissions");
            replace(&path, "new").expect("replaced");
            assert_eq!(fs::metadata(&path).expect("there").permissions().mode() & 0o777, 0o640);
        }
        replace(&path, "newer").expect("replaced");
        assert_eq!(fs::read(&path).expect("there"), b"newer");
        assert_eq!(fs::read_dir(&folder.0).expect("a folder").count(), 2);
        let mut permissions = fs::metadata(&path).expect("there").permissions();
        permissions.set_readonly(true);
        fs::set_permissions(&path, permissions).expect("permissions");
        assert_eq!(replace(&path, "newest"), Err("read-only".to_string()));
    }

    #[cfg(unix)]
    #[test]
    fn a_link_stays_a_link() {
        let folder = Folder::new("link");
        let path = folder.write("a.least", b"old");
        let link = folder.0.join("b.least");
        std::os::unix::fs::symlink(&path, &link).expect("a link");
        replace(&link, "new").expect("replaced");
        assert!(fs::symlink_metadata(&link).expect("there").file_type().is_symlink());
        assert_eq!(fs::read(&path).expect("there"), b"new");
    }
}
