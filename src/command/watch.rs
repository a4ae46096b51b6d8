//! `watch`: puts the threads together and runs the interface.

use std::io;
use std::path::{Path, PathBuf};
use std::sync::mpsc::{Receiver, RecvTimeoutError, Sender, channel};
use std::time::Duration;

use anyhow::{Context, bail};
use ratatui::buffer::Buffer;

use super::arguments::{Colour, Glyphs as GlyphsWanted, Watch};
use super::{rehearse, situation};
use crate::desk::Desk;
use crate::instant::{HOUR_S, Instant};
use crate::journal::{Journal, Resumed, file_for};
use crate::paper::brief::brief_text;
use crate::picture::Picture;
use crate::rehearse::{FeedFile, Rehearsal};
use crate::screen::theme::{Depth, Theme};
use crate::screen::{Glyphs, Look};
use crate::watch::clock::{self, Clock};
use crate::watch::event_loop::{Canvas, Ended, Helpers, Interface, Source};
use crate::watch::input::told;
use crate::watch::terminal::{Terminal, restore_on_panic};
use crate::watch::worker::{Task, Worker};
use crate::watch::{Message, feeder};

/// Exit code for a start that makes no sense.
const USAGE: u8 = 2;
/// Exit codes of a program that a signal ended are this and its number.
const SIGNALLED: i32 = 128;
/// The terminal's hang-up.
const HANG_UP: u8 = 129;

/// Runs the watch until it is told to end; returns the exit code.
///
/// # Errors
///
/// A folder that is none, settings or a journal that cannot be used, a terminal that cannot be set.
pub fn run(arguments: &Watch) -> anyhow::Result<u8> {
    if !Terminal::is_there() {
        use io::Write as _;
        let _ = writeln!(
            io::stderr(),
            "glasskeeper: watch needs a terminal; `glasskeeper brief FOLDER` prints the situation"
        );
        return Ok(USAGE);
    }
    let configured = situation::configured(&arguments.configuration)?;
    let practice = arguments.rehearse.as_deref().map(|name| Practice::begin(name, arguments));
    let practice = practice.transpose()?;
    let folder = match (&practice, &arguments.folder) {
        (Some(practice), _) => practice.folder.clone(),
        (None, Some(folder)) => folder.clone(),
        (None, None) => bail!("a folder to watch is expected"),
    };
    if practice.is_none() && !folder.is_dir() {
        bail!("{}: a folder to watch is expected", folder.display());
    }
    let watch_clock = practice.as_ref().map_or_else(Clock::system, |practice| practice.clock);
    let (journal, resumed) = journal(arguments, practice.is_some(), &folder)?;
    let (messages, received) = channel();
    let (tasks, asked) = channel();
    for trouble in &configured.complaints {
        let _ = messages.send(Message::Trouble(trouble.clone()));
    }
    if resumed.unreadable > 0 {
        let text = format!("{} rows of the journal could not be read", resumed.unreadable);
        let _ = messages.send(Message::Trouble(text));
    }
    let worker = Worker {
        held: resumed.held,
        names: resumed.names,
        settled: resumed.settled,
        decisions: resumed.decisions,
        catalogue: configured.catalogue,
        settings: configured.settings.clone(),
        journal,
        clock: watch_clock,
    };
    spawn("worker", {
        let messages = messages.clone();
        move || worker.run(&asked, &messages)
    })?;
    spawn("feeder", {
        let (tasks, poll) = (tasks.clone(), arguments.poll);
        let folder = folder.clone();
        move || feeder::run(&folder, poll, &|| watch_clock.now(), &tasks)
    })?;
    let practice_folder = practice.as_ref().map(|practice| practice.folder.clone());
    if let Some(practice) = practice {
        let messages = messages.clone();
        spawn("practice", move || practice.play(&messages))?;
    }
    listen_for_signals(&messages)?;
    restore_on_panic();
    let mut screen = Screen(Terminal::enter().context("the terminal cannot be set")?);
    spawn("input", {
        let messages = messages.clone();
        move || listen_to_terminal(&messages)
    })?;
    let (columns, rows) = Terminal::size();
    let mut interface = Interface {
        desk: Desk::new(columns, rows),
        look: look(arguments)?,
        settings: &configured.settings,
        clock: watch_clock,
        link_bits_s: arguments.link,
    };
    let ended =
        interface.run(&mut Incoming(received), &mut screen, &mut Asking { tasks: tasks.clone() });
    let _ = tasks.send(Task::End);
    screen.0.leave();
    if let Some(folder) = practice_folder {
        // A practice folder is ours alone; what cannot be removed is the system's to clear.
        let _ = std::fs::remove_dir_all(folder);
    }
    Ok(match ended {
        Ended::Quit => 0,
        Ended::Signal(number) => u8::try_from(SIGNALLED + number).unwrap_or(HANG_UP),
        Ended::Gone => HANG_UP,
    })
}

fn spawn(name: &str, work: impl FnOnce() + Send + 'static) -> anyhow::Result<()> {
    std::thread::Builder::new().name(name.to_owned()).spawn(work)?;
    Ok(())
}

/// Opens the journal, unless none is wanted.
fn journal(
    arguments: &Watch,
    practice: bool,
    folder: &Path,
) -> anyhow::Result<(Option<Journal>, Resumed)> {
    if arguments.no_journal || practice {
        return Ok((None, Resumed::default()));
    }
    let state = if let Some(state) = &arguments.state {
        state.clone()
    } else {
        use etcetera::BaseStrategy as _;
        let strategy = etcetera::choose_base_strategy()?;
        strategy.state_dir().unwrap_or_else(|| strategy.data_dir()).join("glasskeeper")
    };
    let journal = Journal::open(&file_for(&state, folder))?;
    let resumed = journal.resume()?;
    Ok((Some(journal), resumed))
}

/// How the screen is to look, from the arguments and the environment.
fn look(arguments: &Watch) -> anyhow::Result<Look> {
    let depth = match arguments.colour {
        Some(Colour::Never) => Depth::None,
        Some(Colour::Sixteen) => Depth::Sixteen,
        Some(Colour::Many) => Depth::Palette,
        Some(Colour::Full) => Depth::True,
        None => depth_of_terminal(),
    };
    let glyphs = match arguments.glyphs {
        Some(GlyphsWanted::Braille) => Glyphs::Braille,
        None if speaks_utf8() => Glyphs::Braille,
        Some(GlyphsWanted::Ascii) | None => Glyphs::Ascii,
    };
    let theme = match &arguments.theme {
        Some(name) => Theme::named(name).with_context(|| format!("no theme is called {name:?}"))?,
        None if depth == Depth::None => Theme::monochrome(),
        None => Look::new().theme,
    };
    let link = arguments.link.map_or_else(String::new, |bits| format!("{bits} bit/s"));
    Ok(Look { theme, depth, glyphs, link, ..Look::new() })
}

fn environment(name: &str) -> String {
    #[expect(clippy::disallowed_methods, reason = "the rim reads the environment here")]
    let value = std::env::var(name);
    value.unwrap_or_default()
}

/// What the terminal says it can; `NO_COLOR` (no-color.org) goes before all.
fn depth_of_terminal() -> Depth {
    let term = environment("TERM");
    if !environment("NO_COLOR").is_empty() || term == "dumb" {
        return Depth::None;
    }
    if term.ends_with("-direct")
        || matches!(environment("COLORTERM").as_str(), "truecolor" | "24bit")
    {
        return Depth::True;
    }
    if term.contains("256color") { Depth::Palette } else { Depth::Sixteen }
}

/// Whether the language settings are of UTF-8; the bare console draws no braille even then.
fn speaks_utf8() -> bool {
    let set = ["LC_ALL", "LC_CTYPE", "LANG"]
        .into_iter()
        .map(environment)
        .find(|value| !value.is_empty())
        .unwrap_or_default()
        .to_ascii_lowercase();
    (set.contains("utf-8") || set.contains("utf8")) && environment("TERM") != "linux"
}

/// The terminal's keys and sizes, on a thread of their own.
fn listen_to_terminal(messages: &Sender<Message>) {
    loop {
        let message = match crossterm::event::read() {
            Ok(event) => match told(&event) {
                Some(told) => Message::Told(told),
                None => continue,
            },
            Err(_) => Message::Gone,
        };
        let gone = matches!(message, Message::Gone);
        if messages.send(message).is_err() || gone {
            return;
        }
    }
}

/// Signals on a thread of their own: the terminal library may wait for ever once its terminal is
/// gone, and would not see a flag.
fn listen_for_signals(messages: &Sender<Message>) -> anyhow::Result<()> {
    use signal_hook::consts::{SIGHUP, SIGINT, SIGTERM};
    let mut signals = signal_hook::iterator::Signals::new([SIGHUP, SIGINT, SIGTERM])?;
    let messages = messages.clone();
    spawn("signals", move || {
        for signal in &mut signals {
            if messages.send(Message::Signal(signal)).is_err() {
                return;
            }
        }
    })
}

/// The terminal as the loop knows it.
struct Screen(Terminal);

impl Canvas for Screen {
    fn show(&mut self, screen: Buffer) -> io::Result<usize> {
        self.0.show(screen)
    }

    fn forget(&mut self) {
        self.0.forget();
    }

    fn suspend(&mut self) -> io::Result<()> {
        self.0.suspend()
    }

    fn size(&self) -> (u16, u16) {
        Terminal::size()
    }
}

struct Incoming(Receiver<Message>);

impl Source for Incoming {
    fn next(&mut self, patience: Duration) -> Option<Message> {
        match self.0.recv_timeout(patience) {
            Ok(message) => Some(message),
            Err(RecvTimeoutError::Timeout) => None,
            Err(RecvTimeoutError::Disconnected) => Some(Message::Gone),
        }
    }
}

struct Asking {
    tasks: Sender<Task>,
}

impl Helpers for Asking {
    fn ask(&mut self, task: Task) {
        // A worker that is gone has told so; the last picture stands.
        let _ = self.tasks.send(task);
    }

    fn export(&mut self, picture: &Picture) -> String {
        let stamp = picture.valid.instant().rfc3339().replace([':', '-'], "");
        let path = PathBuf::from(format!("glasskeeper-brief-{stamp}.txt"));
        #[expect(clippy::disallowed_methods, reason = "the rim writes the brief here")]
        let written = std::fs::write(&path, brief_text(picture));
        match written {
            Ok(()) => format!("brief written to {}", path.display()),
            Err(error) => format!("{}: {error}", path.display()),
        }
    }
}

/// A rehearsal played into a folder of its own, with its own clock.
struct Practice {
    folder: PathBuf,
    clock: Clock,
    files: Vec<FeedFile>,
    speed: f64,
}

impl Practice {
    /// Prepares the feed: what is due by `ahead` hours after its start is there at once.
    fn begin(name: &str, arguments: &Watch) -> anyhow::Result<Self> {
        if !(arguments.speed > 0.0 && arguments.speed <= 100_000.0) {
            bail!("--speed: expected more than 0 and at most 100000, found {}", arguments.speed);
        }
        let scenario = rehearse::scenario(name)?;
        let start = scenario.start;
        let files: Vec<FeedFile> = Rehearsal::new(scenario, start).files().collect();
        let ahead_s = crate::quantity::whole_nearest(arguments.ahead.max(0.0) * HOUR_S as f64);
        let begin: Instant = start.plus_s(ahead_s);
        let folder =
            std::env::temp_dir().join(format!("glasskeeper-practice-{}", std::process::id()));
        // Never one that is there already: it is removed at the end, and its files would be read.
        std::fs::create_dir(&folder).with_context(|| folder.display().to_string())?;
        let (past, future): (Vec<_>, Vec<_>) = files.into_iter().partition(|f| f.due <= begin);
        for file in &past {
            put(&folder, file).with_context(|| folder.display().to_string())?;
        }
        let clock = Clock::rehearsed(begin, arguments.speed);
        Ok(Self { folder, clock, files: future, speed: arguments.speed })
    }

    /// Plays the rest, each file when it is due.
    fn play(self, messages: &Sender<Message>) {
        for file in &self.files {
            loop {
                let wait_s = file.due.seconds_since(self.clock.now()) as f64 / self.speed;
                if wait_s <= 0.0 {
                    break;
                }
                clock::pause(Duration::from_secs_f64(wait_s.clamp(0.02, 1.0)));
            }
            if let Err(error) = put(&self.folder, file) {
                let _ = messages.send(Message::Trouble(format!("practice: {error}")));
                return;
            }
        }
    }
}

/// Writes a file under a hidden name and renames it, as a careful feed does.
fn put(folder: &Path, file: &FeedFile) -> io::Result<()> {
    let hidden = folder.join(format!(".{}", file.name));
    #[expect(clippy::disallowed_methods, reason = "the rim writes the practice feed here")]
    std::fs::write(&hidden, &file.bytes)?;
    std::fs::rename(&hidden, folder.join(&file.name))
}
