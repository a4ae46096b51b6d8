//! Words on the chart: each is placed only where no other stands.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use crate::screen::{Look, Role, text};

/// A word that has its place.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Label {
    pub column: u16,
    pub row: u16,
    pub text: String,
    pub role: Role,
}

/// The words of a chart and the cells they take.
#[derive(Clone, Debug)]
pub(super) struct Labels {
    width: u16,
    height: u16,
    taken: Vec<bool>,
    pub placed: Vec<Label>,
}

impl Labels {
    pub(super) fn new(width: u16, height: u16) -> Self {
        let taken = vec![false; usize::from(width) * usize::from(height)];
        Self { width, height, taken, placed: Vec::new() }
    }

    /// Places a word if all its cells lie in the window and are free, with `margin` free cells on
    /// both sides; says whether it did. A word that does not fit is left out, never cut.
    pub(super) fn place(
        &mut self,
        column: i64,
        row: i64,
        text: &str,
        role: Role,
        margin: i64,
    ) -> bool {
        let text = text::safe(text);
        let wide = i64::try_from(text.chars().count()).unwrap_or(i64::MAX);
        let inside = column >= 0
            && row >= 0
            && column.saturating_add(wide) <= i64::from(self.width)
            && row < i64::from(self.height);
        let (Ok(x), Ok(y)) = (u16::try_from(column), u16::try_from(row)) else { return false };
        if !inside || wide == 0 {
            return false;
        }
        let first = (column - margin).max(0);
        let last = (column + wide + margin).min(i64::from(self.width));
        let cells = (first..last).filter_map(|x| self.index(x, row)).collect::<Vec<_>>();
        if cells.iter().any(|index| self.taken[*index]) {
            return false;
        }
        for x in column..column + wide {
            if let Some(index) = self.index(x, row) {
                self.taken[index] = true;
            }
        }
        self.placed.push(Label { column: x, row: y, text, role });
        true
    }

    /// As [`Labels::place`], with three free cells on both sides and a free row above and below.
    pub(super) fn place_apart(&mut self, column: i64, row: i64, text: &str, role: Role) -> bool {
        let wide = i64::try_from(text.chars().count()).unwrap_or(0);
        let crowded = [row - 1, row, row + 1].into_iter().any(|row| {
            (column - 3..column + wide + 3)
                .filter_map(|column| self.index(column, row))
                .any(|index| self.taken[index])
        });
        !crowded && self.place(column, row, text, role, 0)
    }

    fn index(&self, column: i64, row: i64) -> Option<usize> {
        let (x, y) = (u16::try_from(column).ok()?, u16::try_from(row).ok()?);
        (x < self.width && y < self.height)
            .then(|| usize::from(y) * usize::from(self.width) + usize::from(x))
    }

    /// Writes the words.
    pub(super) fn blit(&self, area: Rect, look: &Look, buf: &mut Buffer) {
        for label in &self.placed {
            let (x, y) = (area.x + label.column, area.y + label.row);
            let room = area.right().saturating_sub(x);
            if y < area.bottom() {
                text::put(buf, x, y, room, &label.text, look.style(label.role));
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_word_is_placed_only_where_no_other_stands() {
        let mut labels = Labels::new(12, 2);
        assert!(labels.place(2, 0, "1004", Role::Isobar, 1));
        assert!(!labels.place(5, 0, "996", Role::Isobar, 1));
        assert!(!labels.place(6, 0, "996", Role::Isobar, 1));
        assert!(labels.place(7, 0, "996", Role::Isobar, 1));
        assert!(!labels.place(10, 1, "996", Role::Isobar, 0), "it would be cut");
        assert!(!labels.place(-1, 1, "996", Role::Isobar, 0));
        assert!(!labels.place(0, 2, "9", Role::Isobar, 0));
        assert_eq!(labels.placed.len(), 2);
    }
}
