//! Keys of the terminal library to keys of the desk, and escape sequences put together again that a
//! slow link took apart.

use crossterm::event::{Event as Terminal, KeyCode, KeyEvent, KeyEventKind, KeyModifiers};

use crate::desk::key::{Code, Key};

/// What the terminal told.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Told {
    /// A key.
    Key(Key),
    /// A new size, or word that the content may be lost.
    Size(u16, u16),
}

/// What an event of the library means here; `None` for what does not concern the watch.
pub fn told(event: &Terminal) -> Option<Told> {
    match event {
        Terminal::Key(key) => key_of(*key).map(Told::Key),
        Terminal::Resize(columns, rows) => Some(Told::Size(*columns, *rows)),
        _ => None,
    }
}

fn key_of(event: KeyEvent) -> Option<Key> {
    if event.kind == KeyEventKind::Release {
        return None;
    }
    let code = match event.code {
        KeyCode::Char(c) => Code::Char(c),
        KeyCode::Enter => Code::Enter,
        KeyCode::Esc => Code::Escape,
        KeyCode::Tab => Code::Tab,
        KeyCode::BackTab => Code::BackTab,
        KeyCode::Backspace => Code::Backspace,
        KeyCode::Up => Code::Up,
        KeyCode::Down => Code::Down,
        KeyCode::Left => Code::Left,
        KeyCode::Right => Code::Right,
        KeyCode::PageUp => Code::PageUp,
        KeyCode::PageDown => Code::PageDown,
        KeyCode::Home => Code::Home,
        KeyCode::End => Code::End,
        _ => return None,
    };
    Some(Key { code, control: event.modifiers.contains(KeyModifiers::CONTROL) })
}

/// Puts escape sequences together again: `ESC`, `[` and `A` that came one by one are an arrow.
///
/// After an escape the keys are held back until it is clear what they are; [`Rejoin::give_up`] is
/// called when nothing more came for a while.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Rejoin {
    held: Vec<Key>,
}

impl Rejoin {
    /// Nothing held back.
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes a key and gives the keys that are clear now.
    pub fn take(&mut self, key: Key) -> Vec<Key> {
        self.held.push(key);
        let codes: Vec<Code> = self.held.iter().map(|key| key.code).collect();
        match codes.as_slice() {
            [Code::Escape] | [Code::Escape, Code::Char('[' | 'O')] => Vec::new(),
            [Code::Escape, Code::Char('[' | 'O'), Code::Char(last)] => {
                let code = match last {
                    'A' => Code::Up,
                    'B' => Code::Down,
                    'C' => Code::Right,
                    'D' => Code::Left,
                    'H' => Code::Home,
                    'F' => Code::End,
                    'Z' => Code::BackTab,
                    // A longer sequence, `5~` and the like: what it was is not worth a wrong guess.
                    _ => return std::mem::take(&mut self.held).into_iter().take(1).collect(),
                };
                self.held.clear();
                vec![Key::plain(code)]
            }
            _ => std::mem::take(&mut self.held),
        }
    }

    /// Gives what is held back: it was what it seemed.
    pub fn give_up(&mut self) -> Vec<Key> {
        std::mem::take(&mut self.held)
    }

    /// Whether keys are held back.
    pub fn holds(&self) -> bool {
        !self.held.is_empty()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn taken(keys: &[Key]) -> Vec<Key> {
        let mut rejoin = Rejoin::new();
        let mut out: Vec<Key> = keys.iter().flat_map(|key| rejoin.take(*key)).collect();
        out.extend(rejoin.give_up());
        out
    }

    #[test]
    fn an_arrow_that_came_in_pieces_is_an_arrow_and_an_escape_an_escape() {
        let escape = Key::plain(Code::Escape);
        assert_eq!(taken(&[escape, Key::char('['), Key::char('A')]), [Key::plain(Code::Up)]);
        assert_eq!(taken(&[escape, Key::char('O'), Key::char('D')]), [Key::plain(Code::Left)]);
        assert_eq!(taken(&[escape]), [escape]);
        assert_eq!(taken(&[escape, Key::char('q')]), [escape, Key::char('q')]);
        assert_eq!(taken(&[Key::char('j')]), [Key::char('j')]);
    }
}
