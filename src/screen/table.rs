//! Tables: columns that go when there is no room, rows in pages, one row selected.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::Look;
use super::number::Item;
use super::text::{self, Align};
use super::theme::Role;

/// A column.
#[derive(Clone, Copy, Debug)]
pub(super) struct Column {
    /// Its head, with the unit.
    pub head: &'static str,
    /// Cells; the widening column takes what is left beside.
    pub width: u16,
    /// Where its texts stand.
    pub align: Align,
    /// Columns of the highest rank go first where there is no room; rank 0 stays.
    pub rank: u8,
    /// Whether it takes the room that is left.
    pub widens: bool,
}

/// A column of numbers.
pub(super) const fn number(head: &'static str, width: u16, rank: u8) -> Column {
    Column { head, width, align: Align::Right, rank, widens: false }
}

/// A column of words.
pub(super) const fn words(head: &'static str, width: u16, rank: u8) -> Column {
    Column { head, width, align: Align::Left, rank, widens: false }
}

/// A column of words that takes the room that is left.
pub(super) const fn widening(head: &'static str, width: u16, rank: u8) -> Column {
    Column { head, width, align: Align::Left, rank, widens: true }
}

/// Rows of a page and the first row shown when `selected` is to be seen: whole pages, so that
/// moving the selection redraws two rows and not all.
pub(super) fn page(selected: usize, height: usize) -> (usize, usize) {
    let height = height.max(1);
    (selected / height * height, height)
}

/// How many rows there are, and which page of them is shown.
#[derive(Clone, Copy, Debug)]
pub(super) struct Rows {
    pub count: usize,
    /// The selected row, where one is.
    pub selected: Option<usize>,
    /// A row of the page shown.
    pub page_of: usize,
}

/// Draws the head and one page of rows. `row` makes the items of a row, one for each column.
pub(super) fn draw(
    look: &Look,
    columns: &[Column],
    rows: Rows,
    area: Rect,
    buf: &mut Buffer,
    row: impl Fn(usize) -> Vec<Item>,
) {
    if area.is_empty() {
        return;
    }
    // One cell at the left for the mark of the selected row.
    let room = area.width.saturating_sub(1);
    let (shown, dropped) = fitting(columns, room);
    let secondary = look.style(Role::Secondary);
    let place = |buf: &mut Buffer, y: u16, style_of: &dyn Fn(usize) -> (String, Role)| {
        let mut x = area.x + 1;
        for (index, width) in &shown {
            let (text, role) = style_of(*index);
            let align = columns[*index].align;
            text::field(buf, x, y, *width, &text, align, look.style(role));
            x += width + 1;
        }
    };
    place(buf, area.y, &|index| (columns[index].head.to_owned(), Role::Secondary));
    if dropped {
        text::put(buf, area.right() - 1, area.y, 1, "~", secondary);
    }
    let height = usize::from(area.height - 1);
    let (first, height) = page(rows.page_of, height);
    for k in 0..height.min(rows.count.saturating_sub(first)) {
        let Ok(down) = u16::try_from(k + 1) else { return };
        let y = area.y + down;
        if y >= area.bottom() {
            return;
        }
        let items = row(first + k);
        let chosen = rows.selected == Some(first + k);
        if chosen {
            let line = Rect { y, height: 1, ..area };
            text::fill(buf, line, look.style(Role::Selected));
            text::put(buf, area.x, y, 1, ">", look.style(Role::Selected));
        }
        place(buf, y, &|index| {
            let item = items.get(index).cloned().unwrap_or_else(Item::missing);
            (item.text, if chosen { Role::Selected } else { item.role })
        });
    }
}

/// The columns that fit, with their widths, and whether some had to go.
fn fitting(columns: &[Column], room: u16) -> (Vec<(usize, u16)>, bool) {
    let mut kept: Vec<usize> = (0..columns.len()).collect();
    let wide = |kept: &[usize]| -> u16 {
        let sum: u16 = kept.iter().map(|index| columns[*index].width + 1).sum();
        sum.saturating_sub(1)
    };
    let mut dropped = false;
    while wide(&kept) > room {
        let Some(worst) = kept
            .iter()
            .copied()
            .filter(|index| columns[*index].rank > 0)
            .max_by_key(|index| (columns[*index].rank, *index))
        else {
            break;
        };
        kept.retain(|index| *index != worst);
        dropped = true;
    }
    let mut left = room.saturating_sub(wide(&kept));
    let mut used = 0_u16;
    let mut out = Vec::new();
    for index in kept {
        let column = columns[index];
        let extra = if column.widens { std::mem::take(&mut left) } else { 0 };
        // Where even the columns that stay are too wide, the last ones are cut.
        let width = (column.width + extra).min(room.saturating_sub(used));
        if width == 0 {
            break;
        }
        out.push((index, width));
        used += width + 1;
    }
    (out, dropped)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_of_high_rank_go_first_and_the_last_room_is_used() {
        let columns = [words("name", 5, 0), number("hPa", 6, 1), widening("text", 10, 2)];
        assert_eq!(fitting(&columns, 30), (vec![(0, 5), (1, 6), (2, 17)], false));
        assert_eq!(fitting(&columns, 22), (vec![(0, 5), (1, 6)], true));
        assert_eq!(fitting(&columns, 8), (vec![(0, 5)], true));
        assert_eq!(fitting(&columns, 3), (vec![(0, 3)], true));
        assert_eq!(fitting(&columns, 0), (vec![], true));
    }

    #[test]
    fn pages_are_whole() {
        assert_eq!((page(0, 5), page(4, 5), page(5, 5)), ((0, 5), (0, 5), (5, 5)));
    }
}
