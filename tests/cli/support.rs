//! Running the program in a folder of its own.

use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::{fs, thread};

/// What a run printed and returned.
pub struct Ran {
    /// Exit status.
    pub code: i32,
    /// Standard output.
    pub out: String,
    /// Standard error.
    pub err: String,
}

impl Ran {
    /// The output as JSON.
    #[track_caller]
    pub fn json(&self) -> serde_json::Value {
        serde_json::from_str(&self.out).unwrap_or_else(|e| panic!("{e}: {}{}", self.out, self.err))
    }
}

/// A folder with files, gone at the end of the test.
pub struct Folder(PathBuf);

impl Folder {
    /// An empty one.
    pub fn new() -> Folder {
        static COUNT: AtomicUsize = AtomicUsize::new(0);
        let name = format!("leastwise-cli-{}-{}", std::process::id(), COUNT.fetch_add(1, Ordering::Relaxed));
        let path = std::env::temp_dir().join(name);
        fs::create_dir_all(&path).expect("a folder");
        Folder(path)
    }

    /// With one file.
    pub fn with(name: &str, bytes: impl AsRef<[u8]>) -> Folder {
        let folder = Folder::new();
        folder.write(name, bytes);
        folder
    }

    /// Writes a file.
    pub fn write(&self, name: &str, bytes: impl AsRef<[u8]>) {
        fs::write(self.path(name), bytes).expect("a file");
    }

    /// A file's text.
    pub fn text(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).expect("a file")
    }

    /// Where a file lies.
    pub fn path(&self, name: &str) -> PathBuf {
        self.0.join(name)
    }

    /// Runs the program here, without input.
    pub fn run(&self, arguments: &[&str]) -> Ran {
        run_in(&self.0, arguments, "")
    }

    /// Runs the program here with this on standard input.
    pub fn run_with(&self, arguments: &[&str], input: &str) -> Ran {
        run_in(&self.0, arguments, input)
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(&self.0);
    }
}

/// The example models.
pub fn examples() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../grammar/examples")
}

/// The program, ready to be run in a folder.
pub fn program(folder: &Path) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_leastwise"));
    command.current_dir(folder).env_remove("NO_COLOR");
    command
}

/// Runs the program in a folder.
pub fn run_in(folder: &Path, arguments: &[&str], input: &str) -> Ran {
    let mut command = program(folder);
    command.args(arguments).stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
    let mut child = command.spawn().expect("the program");
    let mut stdin = child.stdin.take().expect("a pipe");
    let input = input.to_string();
    // Fed from beside: the program may print before it has read all. It may also end without reading.
    let feeder = thread::spawn(move || drop(stdin.write_all(input.as_bytes())));
    let output = child.wait_with_output().expect("an end");
    feeder.join().expect("fed");
    let text = |bytes| String::from_utf8(bytes).expect("text");
    Ran { code: output.status.code().unwrap_or(-1), out: text(output.stdout), err: text(output.stderr) }
}
