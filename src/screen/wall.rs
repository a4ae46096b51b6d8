//! The wall.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::Scene;
use super::strip;

/// Draws the wall's screen.
pub(super) fn draw(scene: Scene<'_>, area: Rect, buf: &mut Buffer) {
    strip::summary(buf, Rect { height: area.height.min(2), ..area }, scene);
}
