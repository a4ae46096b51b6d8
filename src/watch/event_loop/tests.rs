//! The loop with pushed messages and a canvas of paper: nothing here waits for a clock.

use std::collections::VecDeque;

use super::*;
use crate::desk::key::Code;
use crate::instant::Instant;

/// Gives its messages in order, then `None` so often, then the terminal is gone.
struct Script {
    messages: VecDeque<Message>,
    idle: usize,
}

impl Source for Script {
    fn next(&mut self, _: Duration) -> Option<Message> {
        if let Some(message) = self.messages.pop_front() {
            return Some(message);
        }
        if self.idle == 0 {
            return Some(Message::Gone);
        }
        self.idle -= 1;
        None
    }
}

#[derive(Default)]
struct Paper {
    frames: Vec<String>,
    forgotten: usize,
}

impl Canvas for Paper {
    fn show(&mut self, screen: Buffer) -> io::Result<usize> {
        self.frames.push(screen.content.iter().map(ratatui::buffer::Cell::symbol).collect());
        Ok(100)
    }

    fn forget(&mut self) {
        self.forgotten += 1;
    }

    fn suspend(&mut self) -> io::Result<()> {
        Ok(())
    }

    fn size(&self) -> (u16, u16) {
        (80, 24)
    }
}

#[derive(Default)]
struct Asked(Vec<String>);

impl Helpers for Asked {
    fn ask(&mut self, task: Task) {
        self.0.push(format!("{task:?}"));
    }

    fn export(&mut self, _: &Picture) -> String {
        "written".to_owned()
    }
}

fn run(messages: Vec<Message>, idle: usize) -> (Ended, Paper, Asked) {
    let settings = Settings::default();
    let mut interface = Interface {
        desk: Desk::new(80, 24),
        look: Look::new(),
        settings: &settings,
        // A clock that stands still.
        clock: Clock::rehearsed(Instant::from_unix_s(1_768_478_400), 0.0),
        link_bits_s: None,
    };
    let mut paper = Paper::default();
    let mut asked = Asked::default();
    let mut script = Script { messages: messages.into(), idle };
    let ended = interface.run(&mut script, &mut paper, &mut asked);
    (ended, paper, asked)
}

fn key(code: Code) -> Message {
    Message::Told(Told::Key(Key::plain(code)))
}

#[test]
fn an_idle_screen_is_drawn_once() {
    let (ended, paper, asked) = run(vec![], 50);
    assert_eq!(ended, Ended::Gone);
    // Once at the start, and once for the clock's first minute.
    assert!(paper.frames.len() <= 2, "{} frames", paper.frames.len());
    assert_eq!(asked.0, ["Time"]);
}

#[test]
fn q_leaves_and_a_signal_ends() {
    let (ended, ..) = run(vec![key(Code::Char('q'))], 0);
    assert_eq!(ended, Ended::Quit);
    let (ended, ..) = run(vec![Message::Signal(15)], 0);
    assert_eq!(ended, Ended::Signal(15));
}

#[test]
fn help_opens_and_trouble_is_shown() {
    // Before there is a Picture, too. The cautions stand at the end: three pages down.
    let mut keys = vec![key(Code::Char('?'))];
    let (_, paper, _) = run(vec![key(Code::Char('?'))], 3);
    let last = paper.frames.last().expect("a frame");
    assert!(last.contains("Keys here: Chart"), "{last}");
    keys.extend((0..3).map(|_| key(Code::PageDown)));
    let (_, paper, _) = run(keys, 3);
    let last = paper.frames.last().expect("a frame");
    assert!(last.contains("not a warning service"), "{last}");
    let (_, paper, _) = run(vec![Message::Trouble("the disk is full".to_owned())], 3);
    assert!(paper.frames.iter().any(|frame| frame.contains("the disk is full")));
}

#[test]
fn a_storm_of_sizes_is_gathered() {
    let sizes = (40..120).map(|columns| Message::Told(Told::Size(columns, 24))).collect();
    let (_, paper, _) = run(sizes, 0);
    assert!(paper.frames.len() <= 2, "{} frames", paper.frames.len());
}
