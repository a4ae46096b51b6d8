//! The terminal: entered, left and never asked anything.

use std::io::{self, IsTerminal as _, Write};
use std::time::Duration;

use crossterm::terminal::{disable_raw_mode, enable_raw_mode};
use ratatui::buffer::Buffer;

use super::encoder::{Pen, encode};

/// Alternate screen, no cursor, cleared: some terminals keep the old text on an alternate screen.
const ENTER: &[u8] = b"\x1b[?1049h\x1b[?25l\x1b[0m\x1b[2J\x1b[H";
/// Attributes off, cursor back, main screen.
const LEAVE: &[u8] = b"\x1b[0m\x1b[?25h\x1b[?1049l";
/// A frame of more bytes than this is marked as one, so that no half of it is shown.
const MARKED_FRAME: usize = 400;

/// The terminal while the watch has it.
#[derive(Debug)]
pub struct Terminal {
    shown: Option<Buffer>,
    pen: Pen,
    bytes: u64,
    entered: bool,
}

impl Terminal {
    /// Whether standard input and output are a terminal.
    pub fn is_there() -> bool {
        io::stdin().is_terminal() && io::stdout().is_terminal()
    }

    /// Takes the terminal.
    ///
    /// # Errors
    ///
    /// A terminal that cannot be set or written.
    pub fn enter() -> io::Result<Self> {
        let mut terminal = Self { shown: None, pen: Pen::default(), bytes: 0, entered: false };
        terminal.take()?;
        // The library sets up its notice of changes of size at the first poll: a change between
        // the first frame and a later poll would be lost.
        let _ = crossterm::event::poll(Duration::ZERO)?;
        Ok(terminal)
    }

    fn take(&mut self) -> io::Result<()> {
        enable_raw_mode()?;
        self.entered = true;
        self.shown = None;
        self.send(ENTER)
    }

    /// Gives the terminal back as it was.
    pub fn leave(&mut self) {
        if self.entered {
            self.entered = false;
            restore();
        }
    }

    /// Gives the terminal back, stops the process, and takes it again when it is resumed.
    ///
    /// # Errors
    ///
    /// A terminal that cannot be set or written.
    pub fn suspend(&mut self) -> io::Result<()> {
        self.leave();
        signal_hook::low_level::raise(signal_hook::consts::SIGSTOP)?;
        self.take()
    }

    /// Size in columns and rows.
    pub fn size() -> (u16, u16) {
        crossterm::terminal::size().unwrap_or((80, 24))
    }

    /// The next frame draws everything anew.
    pub fn forget(&mut self) {
        self.shown = None;
    }

    /// Shows a screen: writes what differs from the last one, in one piece. Returns the bytes
    /// written; equal screens write none.
    ///
    /// # Errors
    ///
    /// A terminal that cannot be written: it is gone.
    pub fn show(&mut self, screen: Buffer) -> io::Result<usize> {
        let mut out = Vec::new();
        encode(self.shown.as_ref(), &screen, &mut self.pen, &mut out);
        self.shown = Some(screen);
        if out.is_empty() {
            return Ok(0);
        }
        if out.len() > MARKED_FRAME {
            out.splice(0..0, b"\x1b[?2026h".iter().copied());
            out.extend_from_slice(b"\x1b[?2026l");
        }
        let length = out.len();
        self.send(&out)?;
        Ok(length)
    }

    /// Bytes written since it was entered.
    pub const fn bytes(&self) -> u64 {
        self.bytes
    }

    /// Rings the bell.
    ///
    /// # Errors
    ///
    /// A terminal that cannot be written.
    pub fn ring(&mut self) -> io::Result<()> {
        self.send(b"\x07")
    }

    fn send(&mut self, bytes: &[u8]) -> io::Result<()> {
        self.bytes += u64::try_from(bytes.len()).unwrap_or(0);
        let mut out = io::stdout().lock();
        out.write_all(bytes)?;
        out.flush()
    }
}

impl Drop for Terminal {
    fn drop(&mut self) {
        self.leave();
    }
}

/// Gives the terminal back, whoever has it: also from the panic hook.
pub fn restore() {
    let mut out = io::stdout().lock();
    let _ = out.write_all(LEAVE);
    let _ = out.flush();
    let _ = disable_raw_mode();
}

/// Restores the terminal before a panic of this thread is told; other threads' panics are caught
/// and shown where they happen.
pub fn restore_on_panic() {
    let owner = std::thread::current().id();
    let before = std::panic::take_hook();
    std::panic::set_hook(Box::new(move |panic| {
        if std::thread::current().id() == owner {
            restore();
            before(panic);
        }
    }));
}
