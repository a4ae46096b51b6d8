//! Code groups: the words of a character report, with their place in the file.

/// One group of a report.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct Group<'a> {
    /// Its characters.
    pub text: &'a [u8],
    /// Where the first of them stands in the expanded file.
    pub start: usize,
}

impl Group<'_> {
    /// One past its last byte in the expanded file.
    pub(crate) const fn end(&self) -> usize {
        self.start + self.text.len()
    }

    /// Its first character, or 0 for an empty group.
    pub(crate) const fn first(&self) -> u8 {
        if let [first, ..] = self.text { *first } else { 0 }
    }

    /// The figures from one place to another; empty (hence garbled) where the group is shorter.
    pub(crate) fn figures(&self, from: usize, to: usize) -> Figures {
        figures(self.text.get(from..to).unwrap_or_default())
    }

    /// The character at a place as a decimal figure.
    pub(crate) fn figure(&self, at: usize) -> Option<u8> {
        self.text.get(at).filter(|byte| byte.is_ascii_digit()).map(|byte| byte - b'0')
    }

    /// Whether it has the given length and only figures and solidi.
    pub(crate) fn is_coded(&self, length: usize) -> bool {
        self.text.len() == length
            && self.text.iter().all(|&byte| byte.is_ascii_digit() || byte == b'/')
    }

    /// Whether every character is a figure.
    pub(crate) fn is_all_figures(&self) -> bool {
        !self.text.is_empty() && self.text.iter().all(u8::is_ascii_digit)
    }
}

/// What a run of figures says.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Figures {
    /// A number.
    Value(u32),
    /// Solidi stand for some or all of the figures: not reported.
    Missing,
    /// Something that is neither.
    Garbled,
}

impl Figures {
    /// The number, if there is one.
    pub(crate) const fn value(self) -> Option<u32> {
        if let Self::Value(value) = self { Some(value) } else { None }
    }
}

/// Reads at most nine figures.
pub(crate) fn figures(text: &[u8]) -> Figures {
    if text.is_empty() || text.len() > 9 {
        return Figures::Garbled;
    }
    let mut value = 0_u32;
    let mut missing = false;
    for &byte in text {
        match byte {
            b'0'..=b'9' => value = value * 10 + u32::from(byte - b'0'),
            b'/' => missing = true,
            _ => return Figures::Garbled,
        }
    }
    if missing { Figures::Missing } else { Figures::Value(value) }
}

/// Tenths to the unit, correctly rounded and never a negative zero.
pub(crate) fn tenths(value: i32) -> f64 {
    f64::from(value) / 10.0
}

/// The groups of a stretch of text, parted by blanks and control characters.
#[derive(Clone, Debug)]
pub(crate) struct Groups<'a> {
    file: &'a [u8],
    at: usize,
    end: usize,
}

impl<'a> Groups<'a> {
    /// The groups of `file` between two places.
    pub(crate) fn new(file: &'a [u8], start: usize, end: usize) -> Self {
        let end = end.min(file.len());
        Self { file, at: start.min(end), end }
    }

    /// The next group, left where it is.
    pub(crate) fn peek(&self) -> Option<Group<'a>> {
        self.clone().next()
    }
}

impl<'a> Iterator for Groups<'a> {
    type Item = Group<'a>;

    fn next(&mut self) -> Option<Group<'a>> {
        let rest = self.file.get(self.at..self.end)?;
        let lead = rest.iter().position(|&byte| !is_blank(byte))?;
        let rest = rest.get(lead..)?;
        let length = rest.iter().position(|&byte| is_blank(byte)).unwrap_or(rest.len());
        let start = self.at + lead;
        self.at = start + length;
        Some(Group { text: rest.get(..length)?, start })
    }
}

/// Whether a byte parts groups: the blank and every control character.
pub(crate) const fn is_blank(byte: u8) -> bool {
    byte <= b' '
}
