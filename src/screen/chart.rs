//! The chart.

use ratatui::buffer::Buffer;
use ratatui::layout::Rect;

use super::Scene;

/// Draws the chart; returns the words for its title.
pub(super) fn draw(scene: Scene<'_>, area: Rect, buf: &mut Buffer) -> String {
    let _ = (area, buf);
    scene.desk.chart.hour_shown(scene.picture).instant().day_time()
}
