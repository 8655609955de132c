//! Running the real binary on one catalogue that is built once.

#![allow(dead_code, reason = "each test file uses a part")]

use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::OnceLock;

/// What a run printed, and its status.
pub struct Run {
    pub stdout: String,
    pub stderr: String,
    pub exit: i32,
}

/// The catalogue of bundled tables, this process's own copy of the one that the binary built.
pub fn catalogue() -> &'static Path {
    static PATH: OnceLock<PathBuf> = OnceLock::new();
    PATH.get_or_init(|| {
        let folder =
            Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("run-{}", std::process::id()));
        std::fs::create_dir_all(&folder).unwrap();
        let path = folder.join("catalogue.sqlite");
        std::fs::copy(built_catalogue(&folder), &path).unwrap();
        path
    })
}

/// Where the binary's first catalogue lies: one for all test programs of the same binary, known
/// by its size and time. Whoever comes first builds it aside and renames it.
fn built_catalogue(folder: &Path) -> PathBuf {
    let file = std::fs::metadata(env!("CARGO_BIN_EXE_lineclear")).unwrap();
    let age = file
        .modified()
        .unwrap()
        .duration_since(std::time::UNIX_EPOCH);
    let name = format!("built-{}-{}.sqlite", file.len(), age.unwrap().as_nanos());
    let shared = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
    if !shared.exists() {
        let own = folder.join("built.sqlite");
        let built = binary()
            .arg("sources")
            .arg("--catalogue")
            .arg(&own)
            .output()
            .unwrap();
        assert!(
            built.status.success(),
            "{}",
            String::from_utf8_lossy(&built.stderr)
        );
        std::fs::rename(&own, &shared).unwrap();
    }
    shared
}

/// The binary with nothing of the tester's own surroundings.
pub fn binary() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_lineclear"));
    command
        .env_remove("COLUMNS")
        .env("NO_COLOR", "1")
        .current_dir(env!("CARGO_MANIFEST_DIR"));
    command
}

/// Runs a command line as typed in a shell, on the shared catalogue unless it names one.
pub fn run(command: &str) -> Run {
    let words = words(command);
    assert_eq!(
        words.first().map(String::as_str),
        Some("lineclear"),
        "{command}"
    );
    let mut process = binary();
    process.args(&words[1..]);
    if !words
        .iter()
        .any(|w| w == "--catalogue" || w == "--help" || w == "--version")
    {
        process.arg("--catalogue").arg(catalogue());
    }
    let output = process.output().unwrap();
    Run {
        stdout: String::from_utf8(output.stdout).unwrap(),
        stderr: String::from_utf8(output.stderr).unwrap(),
        exit: output.status.code().unwrap_or(-1),
    }
}

/// The JSON answer of a command that must succeed.
pub fn json(command: &str) -> serde_json::Value {
    let run = run(&format!("{command} --as json"));
    assert_eq!(run.exit, 0, "{command}: {}", run.stderr);
    serde_json::from_str(&run.stdout).unwrap()
}

/// Words of a command line; double quotes hold blanks together.
fn words(command: &str) -> Vec<String> {
    let mut words = vec![String::new()];
    let (mut quoted, mut any) = (false, false);
    for c in command.chars() {
        match c {
            '"' => {
                quoted = !quoted;
                any = true;
            }
            ' ' if !quoted => {
                if any {
                    words.push(String::new());
                }
                any = false;
            }
            c => {
                words.last_mut().unwrap().push(c);
                any = true;
            }
        }
    }
    words.retain(|w| !w.is_empty());
    words
}
