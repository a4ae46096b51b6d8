//! The real program in a pseudo-terminal, seen through a terminal emulator (vt100).

use std::io::{Read, Write};
use std::num::NonZero;
use std::path::Path;
use std::sync::mpsc::{Receiver, RecvTimeoutError, channel};
use std::time::Duration;

use portable_pty::{Child, CommandBuilder, MasterPty, PtySize, native_pty_system};

/// Longest wait for a condition; a wait ends as soon as the condition holds.
const DEADLINE: Duration = Duration::from_secs(120);

struct Session {
    master: Box<dyn MasterPty + Send>,
    child: Box<dyn Child + Send + Sync>,
    writer: Box<dyn Write + Send>,
    output: Receiver<Vec<u8>>,
    screen: vt100::Parser,
    bytes: Vec<u8>,
}

fn begin() -> std::time::Instant {
    #[expect(clippy::disallowed_methods, reason = "the test bounds its wait")]
    let now = std::time::Instant::now();
    now
}

fn size(columns: u16, rows: u16) -> PtySize {
    PtySize { rows, cols: columns, pixel_width: 0, pixel_height: 0 }
}

fn emulator(columns: u16, rows: u16) -> vt100::Parser {
    let whole = |n: u16| NonZero::new(n).expect("not nought");
    vt100::Parser::new(whole(rows), whole(columns), 0)
}

impl Session {
    fn start(folder: &Path, arguments: &[&str], columns: u16, rows: u16) -> Self {
        let pair = native_pty_system().openpty(size(columns, rows)).expect("a pseudo-terminal");
        let mut command = CommandBuilder::new(env!("CARGO_BIN_EXE_glasskeeper"));
        command.arg("watch");
        command.arg(folder);
        command.args(arguments);
        command.env("TERM", "xterm-256color");
        command.env("LC_ALL", "C.UTF-8");
        command.env("XDG_CONFIG_HOME", folder.join("no-configuration"));
        let child = pair.slave.spawn_command(command).expect("the program starts");
        drop(pair.slave);
        let mut reader = pair.master.try_clone_reader().expect("a reader");
        let (send, output) = channel();
        std::thread::spawn(move || {
            let mut piece = [0; 4096];
            while let Ok(count) = reader.read(&mut piece) {
                if count == 0 || send.send(piece[..count].to_vec()).is_err() {
                    return;
                }
            }
        });
        let writer = pair.master.take_writer().expect("a writer");
        let screen = emulator(columns, rows);
        Self { master: pair.master, child, writer, output, screen, bytes: Vec::new() }
    }

    /// Reads until the condition holds on the screen; shows the screen where it never does.
    #[track_caller]
    fn wait(&mut self, what: &str, condition: impl Fn(&vt100::Screen) -> bool) {
        // For the whole wait: a screen that shows the minute never falls silent.
        let begun = begin();
        while !condition(self.screen.screen()) {
            match self.output.recv_timeout(DEADLINE.saturating_sub(begun.elapsed())) {
                Ok(piece) => {
                    self.screen.process(&piece);
                    self.bytes.extend(piece);
                }
                Err(RecvTimeoutError::Timeout | RecvTimeoutError::Disconnected) => {
                    panic!("never {what}:\n{}", self.screen.screen().contents());
                }
            }
        }
    }

    #[track_caller]
    fn wait_for(&mut self, text: &str) {
        self.wait(&format!("showed {text:?}"), |screen| screen.contents().contains(text));
    }

    fn type_keys(&mut self, keys: &str) {
        self.writer.write_all(keys.as_bytes()).expect("keys are taken");
        self.writer.flush().expect("keys are taken");
    }

    /// Waits for the end; returns the exit code, with the rest of the output read.
    fn end(&mut self) -> u32 {
        let status = self.child.wait().expect("it ends");
        while let Ok(piece) = self.output.recv_timeout(Duration::from_millis(500)) {
            self.screen.process(&piece);
            self.bytes.extend(piece);
        }
        status.exit_code()
    }
}

/// A table of invented reports of this hour round an invented low.
#[expect(clippy::disallowed_methods, reason = "the test makes a feed of its own")]
fn feed(folder: &Path, name: &str, first: usize, count: usize) {
    let now = chrono::Utc::now();
    let time = now.format("%Y-%m-%dT%H:00:00Z");
    let mut text = String::from("station,kind,time,latitude_deg,longitude_deg,pressure_msl_hpa\n");
    for k in first..first + count {
        let (latitude, longitude) = (45.0 + (k % 6) as f64 * 2.5, -40.0 + (k / 6) as f64 * 4.0);
        let far = ((latitude - 51.0) / 6.0).powi(2) + ((longitude + 30.0) / 9.0).powi(2);
        let pressure = 1012.0 - 25.0 * (-far).exp();
        let row = format!("QT{k:03},buoy,{time},{latitude},{longitude},{pressure:.1}\n");
        text.push_str(&row);
    }
    let hidden = folder.join(format!(".{name}"));
    std::fs::write(&hidden, text).expect("written");
    std::fs::rename(&hidden, folder.join(name)).expect("renamed");
}

#[test]
fn it_starts_follows_a_new_file_helps_resizes_and_leaves_the_terminal_as_it_was() {
    let folder = tempfile::tempdir().expect("a folder");
    feed(folder.path(), "one.csv", 0, 30);
    let mut session = Session::start(folder.path(), &["--no-journal"], 80, 24);
    session.wait_for("30 rep");
    assert!(session.screen.screen().alternate_screen());
    feed(folder.path(), "two.csv", 30, 6);
    session.wait_for("36 rep");
    session.type_keys("?");
    session.wait_for("Keys here: Chart");
    // Three pages down stand the cautions.
    session.type_keys("   ");
    session.wait_for("not a warning service");
    session.type_keys("\u{1b}");
    session.wait("closed the help", |screen| !screen.contents().contains("not a warning service"));
    session.master.resize(size(120, 40)).expect("resized");
    session.screen = emulator(120, 40);
    session.wait("filled the new size", |screen| {
        screen.contents().lines().count() > 30 && screen.contents().contains("36 rep")
    });
    session.type_keys("q");
    assert_eq!(session.end(), 0);
    assert!(session.bytes.ends_with(b"\x1b[0m\x1b[?25h\x1b[?1049l"));
    // No query is ever sent: no report of status, attributes or cursor is asked for.
    for query in [&b"\x1b[6n"[..], b"\x1b[c", b"\x1b[5n", b"\x1b[?u"] {
        assert!(!session.bytes.windows(query.len()).any(|piece| piece == query));
    }
}

#[test]
fn a_signal_ends_it_with_the_terminal_restored() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut session = Session::start(folder.path(), &["--no-journal", "--colour", "never"], 80, 24);
    session.wait_for("0 reports");
    let pid = session.child.process_id().expect("a process");
    let status = std::process::Command::new("kill")
        .args(["-TERM", &pid.to_string()])
        .status()
        .expect("kill is there");
    assert!(status.success());
    assert_eq!(session.end(), 128 + 15);
    assert!(!session.screen.screen().alternate_screen());
    assert!(session.bytes.ends_with(b"\x1b[0m\x1b[?25h\x1b[?1049l"));
}

#[test]
fn a_report_cannot_drive_the_terminal() {
    let folder = tempfile::tempdir().expect("a folder");
    feed(folder.path(), "one.csv", 0, 30);
    let hostile = b"\x1b]0;taken\x07\x1b[2J AAXX 15124 03772 \x1b[31m 41480=\n";
    #[expect(clippy::disallowed_methods, reason = "the test makes a feed of its own")]
    std::fs::write(folder.path().join("evil \x1b[31m.txt"), hostile).expect("written");
    let mut session = Session::start(folder.path(), &["--no-journal"], 120, 40);
    session.wait_for("30 rep");
    session.type_keys("q");
    assert_eq!(session.end(), 0);
    let taken = b"\x1b]0;taken";
    assert!(!session.bytes.windows(taken.len()).any(|piece| piece == taken));
}

/// Without a terminal it says so and ends with the code for a wrong use.
#[test]
fn without_a_terminal_it_says_what_to_do_instead() {
    let output = std::process::Command::new(env!("CARGO_BIN_EXE_glasskeeper"))
        .args(["watch", "."])
        .stdin(std::process::Stdio::null())
        .output()
        .expect("it runs");
    assert_eq!(output.status.code(), Some(2));
    assert!(output.stdout.is_empty());
    assert!(String::from_utf8_lossy(&output.stderr).contains("brief FOLDER"));
}
