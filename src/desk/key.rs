//! Keys, independent of any terminal library, and key scripts such as `jj<enter>` for tests.

/// A key.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Code {
    /// A character as typed.
    Char(char),
    /// Enter or Return.
    Enter,
    /// Escape.
    Escape,
    /// Tab.
    Tab,
    /// Tab with Shift.
    BackTab,
    /// Backspace.
    Backspace,
    /// Arrow up.
    Up,
    /// Arrow down.
    Down,
    /// Arrow left.
    Left,
    /// Arrow right.
    Right,
    /// Page up.
    PageUp,
    /// Page down.
    PageDown,
    /// Home.
    Home,
    /// End.
    End,
}

/// A key, and whether Control was held.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Key {
    /// Which key.
    pub code: Code,
    /// Whether Control was held.
    pub control: bool,
}

impl Key {
    /// A key without Control.
    pub const fn plain(code: Code) -> Self {
        Self { code, control: false }
    }

    /// A character without Control.
    pub const fn char(c: char) -> Self {
        Self::plain(Code::Char(c))
    }

    /// A character with Control.
    pub const fn control(c: char) -> Self {
        Self { code: Code::Char(c), control: true }
    }

    /// The keys of a script: characters stand for themselves, `<enter>`, `<esc>`, `<tab>`,
    /// `<backtab>`, `<backspace>`, `<up>`, `<down>`, `<left>`, `<right>`, `<pageup>`,
    /// `<pagedown>`, `<home>`, `<end>`, `<lt>` for what they say, `<c-l>` for Control and `l`.
    ///
    /// # Errors
    ///
    /// The first name in angle brackets that is none of these.
    pub fn script(text: &str) -> Result<Vec<Self>, String> {
        let mut keys = Vec::new();
        let mut rest = text.chars();
        while let Some(c) = rest.next() {
            if c != '<' {
                keys.push(Self::char(c));
                continue;
            }
            let name: String = rest.by_ref().take_while(|c| *c != '>').collect();
            keys.push(Self::named(&name).ok_or_else(|| format!("no key is called <{name}>"))?);
        }
        Ok(keys)
    }

    fn named(name: &str) -> Option<Self> {
        if let Some(letter) = name.strip_prefix("c-") {
            let mut letters = letter.chars();
            return match (letters.next(), letters.next()) {
                (Some(c), None) => Some(Self::control(c)),
                _ => None,
            };
        }
        Some(Self::plain(match name {
            "enter" => Code::Enter,
            "esc" => Code::Escape,
            "tab" => Code::Tab,
            "backtab" => Code::BackTab,
            "backspace" => Code::Backspace,
            "up" => Code::Up,
            "down" => Code::Down,
            "left" => Code::Left,
            "right" => Code::Right,
            "pageup" => Code::PageUp,
            "pagedown" => Code::PageDown,
            "home" => Code::Home,
            "end" => Code::End,
            "lt" => Code::Char('<'),
            _ => return None,
        }))
    }
}
