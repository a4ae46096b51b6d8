//! What changed between two Pictures, as lines of text: for screen readers and dumb terminals.

use crate::picture::Picture;

/// The changes from one Picture to the next, one line each, most urgent first.
pub fn changes(before: Option<&Picture>, after: &Picture) -> Vec<String> {
    let _ = before;
    vec![format!("valid {}", after.valid.instant().day_time())]
}
