//! `watch`: the full-screen interface.

use super::arguments::Watch;

/// Runs the watch until it is told to end.
///
/// # Errors
///
/// A folder that cannot be watched, a terminal that cannot be used.
pub fn run(arguments: &Watch) -> anyhow::Result<u8> {
    let _ = arguments;
    anyhow::bail!("not yet")
}
