//! The faults of a bad line: one group of a report spoilt.

use super::dice::Dice;

/// The report with one group spoilt, and what was done to it. Who reports and when is left alone.
pub(super) fn garble(report: &str, dice: Dice) -> (String, String) {
    let body = report.trim_end_matches('=');
    let mut groups: Vec<String> = body.split(' ').map(str::to_owned).collect();
    // Past BBXX, call sign, day and place, so that the report keeps its owner.
    let first = if groups.first().is_some_and(|g| g == "BBXX" || g == "ZZYY") { 6 } else { 3 };
    let index = first + dice.word("which").below(groups.len().saturating_sub(first));
    let Some(group) = groups.get_mut(index) else {
        return (report.to_owned(), "not garbled: too short".to_owned());
    };
    let before = group.clone();
    let place = dice.word("place").below(before.chars().count());
    let spoilt = |with: Option<char>| -> String {
        before
            .chars()
            .enumerate()
            .filter_map(|(n, figure)| if n == place { with } else { Some(figure) })
            .collect()
    };
    match dice.word("how").below(4) {
        0 => *group = spoilt(Some('K')),
        1 => *group = spoilt(None),
        2 => *group = before.chars().map(|_| '/').collect(),
        _ => {
            let next = groups.get(index + 1).cloned().unwrap_or_default();
            if let Some(group) = groups.get_mut(index) {
                group.push_str(&next);
            }
            if index + 1 < groups.len() {
                groups.remove(index + 1);
            }
        }
    }
    let after = groups.get(index).cloned().unwrap_or_default();
    (groups.join(" ") + "=", format!("garbled: {before} sent as {after:?}"))
}
