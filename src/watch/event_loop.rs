//! The loop of the interface: messages in, screens out. Generic over where messages come from and
//! where screens go, so that tests push messages and look at screens.

use std::io;
use std::time::{Duration, Instant as Steady};

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::Message;
use super::clock::{Clock, steady};
use super::input::{Rejoin, Told};
use super::worker::Task;
use crate::desk::key::Key;
use crate::desk::{Desk, Effect, Event};
use crate::picture::Picture;
use crate::screen::{Look, render};
use crate::settings::Settings;

/// How long an escape waits for the rest of its sequence.
const ESCAPE_WAIT: Duration = Duration::from_millis(100);
/// How long a change of size waits for the next one.
const RESIZE_WAIT: Duration = Duration::from_millis(150);
/// Longest wait of the loop: the minute may change meanwhile.
const IDLE_WAIT: Duration = Duration::from_secs(1);

/// Where screens go.
pub trait Canvas {
    /// Shows a screen; returns the bytes that it cost.
    ///
    /// # Errors
    ///
    /// A terminal that is gone.
    fn show(&mut self, screen: Buffer) -> io::Result<usize>;
    /// The next screen is drawn whole.
    fn forget(&mut self);
    /// Gives the terminal back and stops until resumed.
    ///
    /// # Errors
    ///
    /// A terminal that is gone.
    fn suspend(&mut self) -> io::Result<()>;
    /// Size in columns and rows.
    fn size(&self) -> (u16, u16);
}

/// Where messages come from.
pub trait Source {
    /// The next message within `patience`; `None` where none came, or none ever will.
    fn next(&mut self, patience: Duration) -> Option<Message>;
}

/// What the interface asks of the others.
pub trait Helpers {
    /// Hands a task to the worker.
    fn ask(&mut self, task: Task);
    /// Writes the situation to a file; says where, or why not.
    fn export(&mut self, picture: &Picture) -> String;
}

/// How the loop ended.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Ended {
    /// The watchkeeper left.
    Quit,
    /// A signal.
    Signal(i32),
    /// The terminal is gone.
    Gone,
}

/// State of the interface.
pub struct Interface<'s> {
    /// The desk.
    pub desk: Desk,
    /// How the screen looks.
    pub look: Look,
    /// The settings.
    pub settings: &'s Settings,
    /// The clock.
    pub clock: Clock,
    /// Bits a second that the link bears, where it is thin.
    pub link_bits_s: Option<u64>,
}

impl std::fmt::Debug for Interface<'_> {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_struct("Interface").field("desk", &self.desk).finish_non_exhaustive()
    }
}

/// What the loop has to do when it has time.
#[derive(Debug)]
struct Due {
    draw: bool,
    resize: Option<(Steady, u16, u16)>,
    escape: Option<Steady>,
    link_free: Steady,
}

impl Interface<'_> {
    /// Runs until the watchkeeper leaves, a signal comes or the terminal is gone.
    pub fn run(
        &mut self,
        source: &mut dyn Source,
        canvas: &mut dyn Canvas,
        helpers: &mut dyn Helpers,
    ) -> Ended {
        let mut picture: Option<Picture> = None;
        let mut rejoin = Rejoin::new();
        let mut due = Due { draw: true, resize: None, escape: None, link_free: steady() };
        let mut minute = i64::MIN;
        loop {
            if due.draw && due.resize.is_none() && steady() >= due.link_free {
                due.draw = false;
                match self.draw(picture.as_ref(), canvas) {
                    Ok(bytes) => due.link_free = self.free_after(bytes),
                    Err(_) => return Ended::Gone,
                }
            }
            let message = source.next(patience(&due));
            let mut effects = Vec::new();
            match message {
                Some(Message::Told(Told::Key(key))) => {
                    for key in rejoin.take(key) {
                        effects.extend(self.key(key, picture.as_ref()));
                    }
                    due.escape = rejoin.holds().then(|| steady() + ESCAPE_WAIT);
                }
                Some(Message::Told(Told::Size(columns, rows))) => {
                    due.resize = Some((steady() + RESIZE_WAIT, columns, rows));
                }
                Some(Message::Picture(new)) => {
                    picture = Some(*new);
                    effects.extend(self.desk.update(Event::Picture, picture.as_ref()));
                }
                Some(Message::Trouble(text)) => {
                    effects.extend(self.desk.update(Event::Notice(text), picture.as_ref()));
                }
                Some(Message::Signal(number)) => return Ended::Signal(number),
                Some(Message::Gone) => return Ended::Gone,
                None => {}
            }
            let now = steady();
            if due.escape.is_some_and(|at| now >= at) {
                due.escape = None;
                for key in rejoin.give_up() {
                    effects.extend(self.key(key, picture.as_ref()));
                }
            }
            if let Some((at, columns, rows)) = due.resize
                && now >= at
            {
                due.resize = None;
                canvas.forget();
                due.draw = true;
                let event = Event::Resize { columns, rows };
                effects.extend(self.desk.update(event, picture.as_ref()));
            }
            let time = self.clock.now();
            if time.unix_s().div_euclid(60) != minute {
                minute = time.unix_s().div_euclid(60);
                helpers.ask(Task::Time);
                effects.extend(self.desk.update(Event::Tick(time), picture.as_ref()));
            }
            for effect in effects {
                match self.effect(effect, picture.as_ref(), canvas, helpers) {
                    Ok(Some(ended)) => return ended,
                    Ok(None) => due.draw = true,
                    Err(_) => return Ended::Gone,
                }
            }
        }
    }

    fn key(&mut self, key: Key, picture: Option<&Picture>) -> Vec<Effect> {
        self.desk.update(Event::Key(key), picture)
    }

    fn effect(
        &mut self,
        effect: Effect,
        picture: Option<&Picture>,
        canvas: &mut dyn Canvas,
        helpers: &mut dyn Helpers,
    ) -> io::Result<Option<Ended>> {
        match effect {
            Effect::Draw => {}
            Effect::Repaint => canvas.forget(),
            Effect::Quit => return Ok(Some(Ended::Quit)),
            Effect::Suspend => {
                canvas.suspend()?;
                let (columns, rows) = canvas.size();
                self.desk.update(Event::Resize { columns, rows }, picture);
                canvas.forget();
            }
            Effect::Acknowledge(key) => helpers.ask(Task::Acknowledge(key, true)),
            Effect::Unacknowledge(key) => helpers.ask(Task::Acknowledge(key, false)),
            Effect::Dismiss(name) => helpers.ask(Task::Dismiss(name)),
            Effect::Rename { from, to } => helpers.ask(Task::Rename(from, to)),
            Effect::Overrule { decision, verdict } => {
                helpers.ask(Task::Overrule(decision, verdict));
            }
            Effect::Export => {
                let said = picture
                    .map_or_else(|| "no picture yet".to_owned(), |picture| helpers.export(picture));
                self.desk.update(Event::Notice(said), picture);
            }
        }
        Ok(None)
    }

    fn draw(&self, picture: Option<&Picture>, canvas: &mut dyn Canvas) -> io::Result<usize> {
        let (columns, rows) = canvas.size();
        let area = Rect::new(0, 0, columns, rows);
        let mut screen = Buffer::empty(area);
        render(picture, &self.desk, self.settings, &self.look, area, &mut screen);
        canvas.show(screen)
    }

    /// When the link has carried so many bytes: no frame is written while one is under way, since
    /// what is in the pipe cannot be called back.
    fn free_after(&self, bytes: usize) -> Steady {
        let wait = self.link_bits_s.map_or(0.0, |bits| bytes as f64 * 8.0 / bits.max(1) as f64);
        steady() + Duration::from_secs_f64(wait.min(60.0))
    }
}

fn patience(due: &Due) -> Duration {
    let now = steady();
    let mut patience = IDLE_WAIT;
    for at in [due.resize.map(|(at, _, _)| at), due.escape].into_iter().flatten() {
        patience = patience.min(at.saturating_duration_since(now));
    }
    if due.draw {
        patience = patience.min(due.link_free.saturating_duration_since(now));
    }
    patience
}

#[cfg(test)]
mod tests;
