//! Two screens to the fewest bytes that turn one into the other.
//!
//! Absolute moves only where a shorter one will not do, attributes only where they change, erasure
//! to the end of a line instead of blanks. Nothing is ever asked of the terminal, and equal screens
//! cost no byte.

use ratatui::buffer::{Buffer, Cell};
use ratatui::style::{Color, Modifier};

/// Longest run of unchanged cells that is written again rather than jumped over.
const BRIDGE_MAX: usize = 3;
/// Fewest blanks that an erasure to the end of the line is worth.
const ERASE_MIN: usize = 4;

/// Attributes that the terminal has in force, and where its cursor stands.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Pen {
    fg: Color,
    bg: Color,
    modifier: Modifier,
    /// Column and row; `None` where it is not known.
    at: Option<(u16, u16)>,
}

impl Default for Pen {
    fn default() -> Self {
        Self { fg: Color::Reset, bg: Color::Reset, modifier: Modifier::empty(), at: None }
    }
}

/// Writes what turns `before` into `after`; without `before`, the whole screen on a cleared one.
pub fn encode(before: Option<&Buffer>, after: &Buffer, pen: &mut Pen, out: &mut Vec<u8>) {
    let before = before.filter(|before| before.area == after.area);
    let blank = Cell::default();
    if before.is_none() {
        *pen = Pen::default();
        out.extend_from_slice(b"\x1b[0m\x1b[2J");
    }
    let (width, height) = (usize::from(after.area.width), usize::from(after.area.height));
    for row in 0..height {
        let new = after.content.get(row * width..(row + 1) * width).unwrap_or_default();
        let old = |column: usize| {
            before.and_then(|before| before.content.get(row * width + column)).unwrap_or(&blank)
        };
        let Ok(y) = u16::try_from(row) else { return };
        write_row(new, &old, y, pen, out);
    }
}

fn write_row<'b>(
    new: &[Cell],
    old: &dyn Fn(usize) -> &'b Cell,
    y: u16,
    pen: &mut Pen,
    out: &mut Vec<u8>,
) {
    // Where nothing but plain blanks follows.
    let tail = new.iter().rposition(|cell| !is_plain_blank(cell)).map_or(0, |at| at + 1);
    let mut column = 0;
    while column < new.len() {
        let cell = &new[column];
        if same(cell, old(column)) {
            column += 1;
            continue;
        }
        if column >= tail {
            let left = (column..new.len()).filter(|at| !same(&new[*at], old(*at))).count();
            if left >= ERASE_MIN {
                go_to(new, column, y, pen, out);
                attributes(&new[column], pen, out);
                out.extend_from_slice(b"\x1b[K");
                return;
            }
        }
        go_to(new, column, y, pen, out);
        attributes(cell, pen, out);
        out.extend_from_slice(cell.symbol().as_bytes());
        column += 1;
        // At the right edge terminals differ in where the cursor stands.
        pen.at = u16::try_from(column).ok().filter(|_| column < new.len()).map(|x| (x, y));
    }
}

fn is_plain_blank(cell: &Cell) -> bool {
    cell.symbol() == " " && cell.bg == Color::Reset && !visible_on_blank(cell.modifier)
}

fn visible_on_blank(modifier: Modifier) -> bool {
    modifier.intersects(Modifier::REVERSED | Modifier::UNDERLINED | Modifier::CROSSED_OUT)
}

/// Whether two cells look the same: the colour of a blank's ink does not show.
fn same(one: &Cell, other: &Cell) -> bool {
    if one.symbol() == " " && other.symbol() == " " {
        let plain = !visible_on_blank(one.modifier) && !visible_on_blank(other.modifier);
        return one.bg == other.bg
            && (plain || (one.modifier == other.modifier && one.fg == other.fg));
    }
    one.symbol() == other.symbol()
        && one.fg == other.fg
        && one.bg == other.bg
        && one.modifier == other.modifier
}

fn go_to(new: &[Cell], column: usize, y: u16, pen: &mut Pen, out: &mut Vec<u8>) {
    let Ok(x) = u16::try_from(column) else { return };
    match pen.at {
        Some(at) if at == (x, y) => {}
        Some((from, row)) if row == y && from < x => {
            let gap = usize::from(x - from);
            let between = new.get(usize::from(from)..column).unwrap_or_default();
            let bridged = gap <= BRIDGE_MAX
                && between.iter().all(|cell| {
                    cell.symbol().len() == 1
                        && (cell.fg, cell.bg, cell.modifier) == (pen.fg, pen.bg, pen.modifier)
                });
            if bridged {
                for cell in between {
                    out.extend_from_slice(cell.symbol().as_bytes());
                }
            } else if gap == 1 {
                out.extend_from_slice(b"\x1b[C");
            } else {
                out.extend_from_slice(format!("\x1b[{gap}C").as_bytes());
            }
        }
        Some((_, row)) if x == 0 && row < y && y - row == 1 => out.extend_from_slice(b"\r\n"),
        _ if x == 0 && y == 0 => out.extend_from_slice(b"\x1b[H"),
        _ if x == 0 => out.extend_from_slice(format!("\x1b[{}H", y + 1).as_bytes()),
        _ => out.extend_from_slice(format!("\x1b[{};{}H", y + 1, x + 1).as_bytes()),
    }
    pen.at = Some((x, y));
}

/// The attributes that a blank leaves unseen are left as they are.
fn attributes(cell: &Cell, pen: &mut Pen, out: &mut Vec<u8>) {
    let blank = cell.symbol() == " " && !visible_on_blank(cell.modifier);
    let mut codes: Vec<String> = Vec::new();
    let unseen = visible_on_blank(pen.modifier);
    if (!blank && cell.modifier != pen.modifier) || (blank && unseen) {
        let wanted = if blank { Modifier::empty() } else { cell.modifier };
        if !(pen.modifier - wanted).is_empty() {
            codes.push("0".to_owned());
            *pen = Pen { at: pen.at, ..Pen::default() };
        }
        for (flag, code) in [
            (Modifier::BOLD, "1"),
            (Modifier::DIM, "2"),
            (Modifier::ITALIC, "3"),
            (Modifier::UNDERLINED, "4"),
            (Modifier::REVERSED, "7"),
            (Modifier::CROSSED_OUT, "9"),
        ] {
            if wanted.contains(flag) && !pen.modifier.contains(flag) {
                codes.push(code.to_owned());
            }
        }
        pen.modifier = wanted;
    }
    if !blank && cell.fg != pen.fg {
        codes.push(colour(cell.fg, 30));
        pen.fg = cell.fg;
    }
    if cell.bg != pen.bg {
        codes.push(colour(cell.bg, 40));
        pen.bg = cell.bg;
    }
    if !codes.is_empty() {
        let only_reset = codes.len() == 1 && codes[0] == "0";
        let list = if only_reset { String::new() } else { codes.join(";") };
        out.extend_from_slice(format!("\x1b[{list}m").as_bytes());
    }
}

/// Code of a colour; `base` is 30 for ink and 40 for ground.
fn colour(colour: Color, base: u16) -> String {
    let bright = base + 60;
    match colour {
        Color::Reset => (base + 9).to_string(),
        Color::Black => base.to_string(),
        Color::Red => (base + 1).to_string(),
        Color::Green => (base + 2).to_string(),
        Color::Yellow => (base + 3).to_string(),
        Color::Blue => (base + 4).to_string(),
        Color::Magenta => (base + 5).to_string(),
        Color::Cyan => (base + 6).to_string(),
        Color::Gray => (base + 7).to_string(),
        Color::DarkGray => bright.to_string(),
        Color::LightRed => (bright + 1).to_string(),
        Color::LightGreen => (bright + 2).to_string(),
        Color::LightYellow => (bright + 3).to_string(),
        Color::LightBlue => (bright + 4).to_string(),
        Color::LightMagenta => (bright + 5).to_string(),
        Color::LightCyan => (bright + 6).to_string(),
        Color::White => (bright + 7).to_string(),
        Color::Rgb(red, green, blue) => format!("{};2;{red};{green};{blue}", base + 8),
        Color::Indexed(number) => format!("{};5;{number}", base + 8),
    }
}

#[cfg(test)]
mod tests;
