//! An import that is killed, stopped, starved or disturbed leaves the catalogue as it was, and says
//! so. All tests run the real binary.

#![allow(clippy::unwrap_used, reason = "a panic in a test is its report")]

mod common;

use std::fmt::Write as _;
use std::os::unix::fs::{MetadataExt, PermissionsExt};
use std::os::unix::process::CommandExt;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Output, Stdio};
use std::time::{Duration, Instant};

use common::{binary, catalogue};
use rusqlite::Connection;

/// Rows of the large table.
const ROWS: usize = 200_000;

const DESCRIPTION: &str = r#"key = "harrow-bay-survey"
title = "Survey of the Harrow Bay bench (invented)"
citation = "Harrow Bay logbook 15 (invented)"
licence = "CC0-1.0"
kind = "paper"
[[table]]
file = "lines.csv"
records = "lines"
[table.columns]
species = { column = "species" }
wavelength = { column = "wavelength_nm", unit = "nm", medium = "vacuum" }
rate = { column = "rate", unit = "s-1" }
"#;

/// Numbers that look random and are the same in every run (Knuth 1997, vol. 2, § 3.3.4, table 1,
/// line 26: the multiplier).
struct Lottery(u64);

impl Lottery {
    /// The next number from 0 to 1.
    fn next(&mut self) -> f64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1);
        (self.0 >> 11) as f64 / (1u64 << 53) as f64
    }
}

/// A folder with a table of so many lines, invented.
fn survey(rows: usize) -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    let species = [
        "Pr I", "Nd I", "Sm I", "Eu I", "Gd I", "Tb I", "Dy I", "Ho I", "Er I", "Tm I",
    ];
    let mut lottery = Lottery(1);
    let mut text = "species,wavelength_nm,rate\n".to_owned();
    for row in 0..rows {
        let wavelength = 200.0 + 700.0 * lottery.next();
        let rate = 1e5 + 1e8 * lottery.next();
        writeln!(text, "{},{wavelength:.5},{rate:.0}", species[row % 10]).unwrap();
    }
    std::fs::write(folder.path().join("lines.csv"), text).unwrap();
    std::fs::write(folder.path().join("source.toml"), DESCRIPTION).unwrap();
    folder
}

fn import(catalogue: &Path, source: &Path) -> Command {
    let mut command = binary();
    command
        .arg("import")
        .arg(source)
        .arg("--catalogue")
        .arg(catalogue);
    command.stdout(Stdio::piped()).stderr(Stdio::piped());
    command
}

fn window(catalogue: &Path) -> Command {
    let mut command = binary();
    command.args(["window", "588.9..589.1nm", "--of", "Na I", "--catalogue"]);
    command.arg(catalogue);
    command
}

fn copy(folder: &Path, name: &str) -> PathBuf {
    let path = folder.join(name);
    for end in ["-wal", "-shm", "-journal"] {
        let mut beside = path.clone().into_os_string();
        beside.push(end);
        let _ = std::fs::remove_file(beside);
    }
    std::fs::copy(catalogue(), &path).unwrap();
    path
}

fn said(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).unwrap()
}

/// One sentence, exit status 1.
fn refused(output: &Output, words: &[&str]) {
    let said = said(output);
    assert_eq!(output.status.code(), Some(1), "{said}");
    assert_eq!(said.lines().count(), 1, "{said}");
    for word in words {
        assert!(said.contains(word), "`{word}` is missing: {said}");
    }
}

/// Every value of every table, and whether the file is sound.
fn state(path: &Path) -> Vec<String> {
    let connection = Connection::open(path).unwrap();
    let sound: String = connection
        .query_row("PRAGMA integrity_check", [], |row| row.get(0))
        .unwrap();
    assert_eq!(sound, "ok");
    let mut select = connection
        .prepare("SELECT name FROM sqlite_schema WHERE type = 'table' ORDER BY name")
        .unwrap();
    let tables: Vec<String> = select
        .query_map([], |row| row.get(0))
        .unwrap()
        .map(Result::unwrap)
        .collect();
    assert!(tables.len() >= 8, "{tables:?}");
    tables
        .iter()
        .map(|table| {
            let mut info = connection
                .prepare(&format!("SELECT name FROM pragma_table_info('{table}')"))
                .unwrap();
            let columns: Vec<String> = info
                .query_map([], |row| row.get::<_, String>(0))
                .unwrap()
                .map(|name| format!("quote(\"{}\")", name.unwrap()))
                .collect();
            let all = columns.join(" || ',' || ");
            connection
                .query_row(
                    &format!("SELECT group_concat({all}, ';') FROM {table}"),
                    [],
                    |row| row.get::<_, Option<String>>(0),
                )
                .unwrap()
                .unwrap_or_default()
        })
        .collect()
}

/// The two states that are allowed, and how long it takes from one to the other.
struct Whole {
    before: Vec<String>,
    after: Vec<String>,
    duration: Duration,
}

fn whole(folder: &Path, source: &Path) -> Whole {
    let path = copy(folder, "whole.sqlite");
    let before = state(&path);
    let start = Instant::now();
    let output = import(&path, source).output().unwrap();
    let duration = start.elapsed();
    assert!(output.status.success(), "{}", said(&output));
    let after = state(&path);
    assert_ne!(before, after);
    Whole {
        before,
        after,
        duration,
    }
}

#[test]
fn a_killed_import_leaves_the_state_before_or_after() {
    let folder = tempfile::tempdir().unwrap();
    let source = survey(ROWS);
    let whole = whole(folder.path(), source.path());
    let seed = 20_261_201;
    let mut lottery = Lottery(seed);
    // Half of the moments lie in the first third, which is cheap; the others up to the end.
    let spans = [1.0 / 3.0, 1.02];
    let moments: Vec<f64> = (0..100).map(|i| spans[i % 2] * lottery.next()).collect();
    // Two at a time, each on a catalogue of its own.
    let outcomes: Vec<(usize, usize)> = std::thread::scope(|scope| {
        let halves = moments
            .chunks(moments.len() / 2)
            .enumerate()
            .map(|(half, moments)| {
                let (folder, source, whole) = (folder.path(), source.path(), &whole);
                scope.spawn(move || kill_at(folder, source, whole, half, moments))
            });
        let threads: Vec<_> = halves.collect();
        threads.into_iter().map(|t| t.join().unwrap()).collect()
    });
    let killed: usize = outcomes.iter().map(|o| o.0).sum();
    let before: usize = outcomes.iter().map(|o| o.1).sum();
    println!("{killed} killed, {before} left the state before; seed {seed}");
    assert!(
        killed >= 50,
        "only {killed} imports were still running when they were killed"
    );
    assert!(before >= 50, "{before}");
}

/// How many were killed in time, and how many left the state before.
fn kill_at(
    folder: &Path,
    source: &Path,
    whole: &Whole,
    half: usize,
    moments: &[f64],
) -> (usize, usize) {
    let name = format!("killed-{half}.sqlite");
    let mut path = copy(folder, &name);
    let mut duration = whole.duration;
    let (mut killed, mut before) = (0, 0);
    for moment in moments {
        // Where the machine has become faster than it was when the whole import was measured, the
        // kill comes too late: it is tried again with the shorter time.
        for _ in 0..5 {
            let in_time = kill_one(&path, source, duration.mul_f64(*moment));
            let found = state(&path);
            if found != whole.before {
                assert!(
                    found == whole.after,
                    "killed at {moment}: neither before nor after"
                );
                path = copy(folder, &name);
            }
            match in_time {
                Ok(()) => {
                    killed += 1;
                    before += usize::from(found == whole.before);
                    break;
                }
                Err(took) if *moment < 0.9 => duration = duration.min(took),
                Err(_) => break,
            }
        }
    }
    (killed, before)
}

/// Kills an import at a moment; how long it took where it was done before.
fn kill_one(path: &Path, source: &Path, moment: Duration) -> Result<(), Duration> {
    let start = Instant::now();
    let mut child = import(path, source).spawn().unwrap();
    while start.elapsed() < moment {
        if child.try_wait().unwrap().is_some() {
            return Err(start.elapsed());
        }
        std::thread::sleep(Duration::from_millis(1).min(moment.saturating_sub(start.elapsed())));
    }
    child.kill().unwrap(); // SIGKILL
    let output = child.wait_with_output().unwrap();
    if output.status.success() {
        return Err(start.elapsed());
    }
    Ok(())
}

fn signal(child: &Child, name: &str) {
    let sent = Command::new("kill")
        .arg(format!("-{name}"))
        .arg(child.id().to_string())
        .status()
        .unwrap();
    assert!(sent.success());
}

/// Waits until a process writes to the catalogue.
fn until_it_writes(path: &Path) {
    let other = Connection::open(path).unwrap();
    other.busy_timeout(Duration::ZERO).unwrap();
    while other.execute_batch("BEGIN IMMEDIATE; ROLLBACK").is_ok() {
        std::thread::sleep(Duration::from_millis(2));
    }
}

#[test]
fn a_wish_to_stop_leaves_the_old_state_and_one_sentence() {
    let folder = tempfile::tempdir().unwrap();
    let source = survey(ROWS);
    let path = copy(folder.path(), "stopped.sqlite");
    let before = state(&path);
    for name in ["INT", "TERM"] {
        let child = import(&path, source.path()).spawn().unwrap();
        until_it_writes(&path);
        signal(&child, name);
        let output = child.wait_with_output().unwrap();
        refused(&output, &["stopped as asked", "nothing was changed"]);
        assert_eq!(state(&path), before, "{name}");
    }
}

#[test]
fn a_second_import_waits_for_the_first() {
    let folder = tempfile::tempdir().unwrap();
    let (large, small) = (survey(40_000), survey(10));
    let text = DESCRIPTION.replace("harrow-bay-survey", "harrow-bay-notes");
    std::fs::write(small.path().join("source.toml"), text).unwrap();
    let path = copy(folder.path(), "two.sqlite");
    let first = import(&path, large.path()).spawn().unwrap();
    until_it_writes(&path);
    let second = import(&path, small.path()).output().unwrap();
    assert!(second.status.success(), "{}", said(&second));
    let first = first.wait_with_output().unwrap();
    assert!(first.status.success(), "{}", said(&first));
    let keys: i64 = Connection::open(&path)
        .unwrap()
        .query_row(
            "SELECT count(*) FROM source WHERE key LIKE 'harrow-bay-%'",
            [],
            |row| row.get(0),
        )
        .unwrap();
    assert_eq!(keys, 2);
}

#[test]
fn an_import_that_waited_in_vain_says_so() {
    let folder = tempfile::tempdir().unwrap();
    let source = survey(10);
    let path = copy(folder.path(), "held.sqlite");
    let holder = Connection::open(&path).unwrap();
    holder.execute_batch("BEGIN IMMEDIATE").unwrap();
    let output = import(&path, source.path()).output().unwrap();
    refused(
        &output,
        &[
            "another process is writing",
            "try again",
            "nothing was changed",
        ],
    );
}

#[test]
fn readers_go_on_while_an_import_writes() {
    let folder = tempfile::tempdir().unwrap();
    let source = survey(ROWS);
    let path = copy(folder.path(), "read.sqlite");
    let alone = window(&path).output().unwrap();
    let mut child = import(&path, source.path()).spawn().unwrap();
    until_it_writes(&path);
    let mut answers = 0;
    while child.try_wait().unwrap().is_none() {
        let answer = window(&path).output().unwrap();
        assert!(answer.status.success(), "{}", said(&answer));
        assert_eq!(answer.stdout, alone.stdout);
        answers += 1;
    }
    assert!(child.wait().unwrap().success());
    assert!(answers > 0, "no answer while the import ran");
}

#[test]
fn a_file_that_may_not_grow_leaves_the_old_state_and_one_sentence() {
    let folder = tempfile::tempdir().unwrap();
    let source = survey(ROWS);
    let path = copy(folder.path(), "small.sqlite");
    let before = state(&path);
    // The shell's limit counts 512 bytes (POSIX); the catalogue is there and may be opened.
    let command = import(&path, source.path());
    let mut shell = Command::new("sh");
    shell.args(["-c", "trap '' XFSZ; ulimit -f 4000; exec \"$@\"", "sh"]);
    shell.arg(command.get_program()).args(command.get_args());
    let output = shell
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap();
    refused(
        &output,
        &["could not be written", "free space", "nothing was changed"],
    );
    assert_eq!(state(&path), before);
}

#[test]
fn a_full_disk_leaves_the_old_state_and_one_sentence() {
    // A disk of its own is root's to make; a catalogue with a limit of pages is as full as a disk,
    // and SQLite gives the same answer (SQLITE_FULL).
    let folder = tempfile::tempdir().unwrap();
    let source = survey(ROWS);
    let path = copy(folder.path(), "full.sqlite");
    let before = state(&path);
    let disk = folder.path().join("disk");
    std::fs::create_dir(&disk).unwrap();
    let size = std::fs::metadata(&path).unwrap().len() + (4 << 20);
    let mounted = Command::new("mount")
        .args(["-t", "tmpfs", "-o", &format!("size={size}"), "none"])
        .arg(&disk)
        .stderr(Stdio::null())
        .status()
        .is_ok_and(|status| status.success());
    if mounted {
        let on_disk = disk.join("full.sqlite");
        std::fs::copy(&path, &on_disk).unwrap();
        let output = import(&on_disk, source.path()).output().unwrap();
        let found = state(&on_disk);
        Command::new("umount").arg(&disk).status().unwrap();
        refused(
            &output,
            &["disk is full", "free some space", "nothing was changed"],
        );
        assert_eq!(found, before);
    }
    let mut catalogue = lineclear::catalogue::Catalogue::open(&path).unwrap();
    let pages: i64 = Connection::open(&path)
        .unwrap()
        .query_row("PRAGMA page_count", [], |row| row.get(0))
        .unwrap();
    catalogue.limit_pages(pages + 100).unwrap();
    let files = lineclear::catalogue::SourceFiles::find(source.path()).unwrap();
    let error = files
        .import(&mut catalogue, 0, false)
        .unwrap_err()
        .to_string();
    assert!(
        error.contains("the disk is full") && error.contains("nothing was changed"),
        "{error}"
    );
    drop(catalogue);
    assert_eq!(state(&path), before);
}

/// The same command as somebody who is not root; the binary is put where everybody may run it.
fn unprivileged(command: &Command, folder: &Path) -> Command {
    let program = folder.join("lineclear");
    if !program.exists() {
        std::fs::copy(command.get_program(), &program).unwrap();
    }
    let mut command_for_all = Command::new(program);
    command_for_all.args(command.get_args()).current_dir(folder);
    if std::fs::metadata("/proc/self").unwrap().uid() == 0 {
        command_for_all.uid(65_534).gid(65_534);
    }
    command_for_all
}

fn may(path: &Path, mode: u32) {
    std::fs::set_permissions(path, std::fs::Permissions::from_mode(mode)).unwrap();
}

#[test]
fn a_read_only_folder_is_read_and_not_written() {
    let folder = tempfile::tempdir().unwrap();
    may(folder.path(), 0o755);
    let source = survey(10);
    may(source.path(), 0o755);
    let shut = folder.path().join("shut");
    std::fs::create_dir(&shut).unwrap();
    let path = copy(&shut, "cat%20a?log#ue.sqlite");
    let before = state(&path);
    for end in ["-wal", "-shm"] {
        let mut beside = path.clone().into_os_string();
        beside.push(end);
        let _ = std::fs::remove_file(beside);
    }
    may(&path, 0o444);
    may(&shut, 0o555);
    let answer = unprivileged(&window(&path), folder.path())
        .output()
        .unwrap();
    assert!(answer.status.success(), "{}", said(&answer));
    assert!(String::from_utf8_lossy(&answer.stdout).contains("588.995"));
    let output = unprivileged(&import(&path, source.path()), folder.path())
        .output()
        .unwrap();
    refused(&output, &["read-only", "--catalogue"]);
    may(&shut, 0o755);
    may(&path, 0o644);
    assert_eq!(state(&path), before);
}

#[test]
fn a_damaged_catalogue_ends_in_one_sentence_wherever_the_damage_is() {
    let folder = tempfile::tempdir().unwrap();
    let source = survey(100);
    let whole = std::fs::read(catalogue()).unwrap();
    let path = folder.path().join("damaged.sqlite");
    let mut lottery = Lottery(7);
    let mut refusals = 0;
    for round in 0..12 {
        let mut bytes = whole.clone();
        // Every page of a stretch is overwritten; the first page stays, so that it looks sound.
        let pages = bytes.len() / 4096;
        let from = 1 + (lottery.next() * (pages - 2) as f64) as usize;
        let to = (from + pages / 4).min(pages);
        for byte in &mut bytes[from * 4096..to * 4096] {
            *byte = (256.0 * lottery.next()) as u8;
        }
        std::fs::write(&path, bytes).unwrap();
        for command in [&mut window(&path), &mut import(&path, source.path())] {
            let output = command.output().unwrap();
            let said = said(&output);
            assert!(
                output.status.code().is_some_and(|code| code <= 1) && said.lines().count() <= 1,
                "round {round}: {said}"
            );
            if output.status.code() == Some(1) {
                refusals += 1;
                assert!(said.contains("damaged"), "round {round}: {said}");
            }
        }
    }
    assert!(refusals > 5, "{refusals}");
}
