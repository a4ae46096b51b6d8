//! The keys in words: the bottom line and the help are made of these.

use super::Pane;

/// Keys and what they do, most useful first.
pub type Keys = &'static [(&'static str, &'static str)];

/// Keys that work in every pane.
pub const EVERYWHERE: Keys = &[
    ("?", "help, Esc closes it"),
    ("q", "quit (also Ctrl-C)"),
    ("Tab", "next pane, Shift-Tab the one before"),
    ("1-7", "panes: Chart Systems Winds Convergence Tendencies Alerts Arrivals"),
    ("CSWVTAR", "the same by letter"),
    ("z", "pane in front alone on the screen, and back"),
    ("[ ]", "an hour back, an hour on (beyond the newest: extrapolation)"),
    (".", "back to the newest hour"),
    ("p", "write the situation report to a file"),
    ("Ctrl-L", "draw everything anew"),
    ("Ctrl-Z", "suspend"),
    ("Esc", "closes what is open; never quits"),
];

/// Keys of the chart.
pub const CHART: Keys = &[
    ("hjkl", "move the chart, or the cursor where it is on (also arrows)"),
    ("+ -", "zoom"),
    ("x", "cursor with its read-out on and off"),
    ("n N", "next and previous high or low in the middle"),
    ("f", "follow the system in the middle, and let go"),
    ("0", "whole region"),
    ("m", "ruler from the cursor"),
    ("w", "expected surface wind"),
    ("i", "isallobars, 3 h"),
    ("v", "convergence"),
    ("e", "analysis error"),
    ("r", "reports"),
    ("t", "tracks"),
    ("o", "outlook (extrapolation)"),
    ("u", "meridians and parallels"),
];

/// Keys of a list.
pub const LIST: Keys = &[
    ("j k", "down and up (also arrows)"),
    ("g G", "first and last (also Home, End)"),
    ("PgDn PgUp", "a page on and back (also Ctrl-F, Ctrl-B)"),
    ("Enter", "show on the chart"),
    ("o", "next order"),
    ("O", "turn the order round"),
    ("/", "filter"),
];

/// Keys of the Systems list beside those of a list.
pub const SYSTEMS: Keys =
    &[("f", "follow on the chart"), ("n", "name it"), ("d", "dismiss it as not real (asks first)")];

/// Keys of the Alerts list beside those of a list.
pub const ALERTS: Keys = &[("a", "acknowledge"), ("u", "take back the acknowledgement")];

/// Keys of the Arrivals list beside those of a list.
pub const ARRIVALS: Keys = &[
    ("y", "overrule the checks: the report is sound"),
    ("x", "overrule the checks: refuse the report"),
    ("u", "take the decision back"),
];

/// The keys of a pane.
pub const fn here(pane: Pane) -> (Keys, Keys) {
    match pane {
        Pane::Chart => (CHART, &[]),
        Pane::Systems => (LIST, SYSTEMS),
        Pane::Alerts => (LIST, ALERTS),
        Pane::Arrivals => (LIST, ARRIVALS),
        _ => (LIST, &[]),
    }
}

/// The bottom line of a pane: keys in a word each, most useful first.
pub const fn bottom(pane: Pane) -> Keys {
    match pane {
        Pane::Chart => &[
            ("?", "help"),
            ("Tab", "pane"),
            ("hjkl", "move"),
            ("+-", "zoom"),
            ("x", "cursor"),
            ("n", "next centre"),
            ("[]", "time"),
            ("w", "wind"),
            ("i", "isallobars"),
            ("v", "convergence"),
            ("e", "error"),
            ("r", "reports"),
            ("t", "tracks"),
            ("o", "outlook"),
            ("m", "ruler"),
            ("0", "whole region"),
            ("z", "alone"),
            ("q", "quit"),
        ],
        Pane::Alerts => &[
            ("?", "help"),
            ("Tab", "pane"),
            ("jk", "select"),
            ("a", "acknowledge"),
            ("u", "take back"),
            ("Enter", "on chart"),
            ("/", "filter"),
            ("o", "order"),
            ("z", "alone"),
            ("q", "quit"),
        ],
        Pane::Systems => &[
            ("?", "help"),
            ("Tab", "pane"),
            ("jk", "select"),
            ("Enter", "on chart"),
            ("f", "follow"),
            ("o", "order"),
            ("/", "filter"),
            ("n", "name"),
            ("d", "dismiss"),
            ("z", "alone"),
            ("q", "quit"),
        ],
        Pane::Arrivals => &[
            ("?", "help"),
            ("Tab", "pane"),
            ("jk", "select"),
            ("y", "it is sound"),
            ("x", "refuse it"),
            ("u", "take back"),
            ("/", "filter"),
            ("o", "order"),
            ("z", "alone"),
            ("q", "quit"),
        ],
        _ => &[
            ("?", "help"),
            ("Tab", "pane"),
            ("jk", "select"),
            ("Enter", "on chart"),
            ("o", "order"),
            ("/", "filter"),
            ("z", "alone"),
            ("q", "quit"),
        ],
    }
}

/// What the help says beside the keys.
pub const CAUTIONS: &[&str] = &[
    "This supports a trained watchkeeper. It is not a warning service and not for",
    "navigation by itself.",
    "Official warnings, the master's judgement, local codes and licensed practice",
    "come first.",
    "Outlooks are extrapolation of what has been, not forecasts.",
    "No alert is no promise of safety: few or old reports make a quiet picture.",
    "A value with ? is weak: much error, little evidence, or doubt. - is unknown.",
];
