//! Interface state: `(&mut Desk, Event) -> effects`.
//!
//! The desk is where the watchkeeper sits: which pane is in front, what is selected, where the
//! chart is looked at, what is being typed. It holds no report, reads no clock and draws nothing;
//! the present moment comes in as an event. What it wants done outside it says with an [`Effect`].

use crate::instant::Instant;
use crate::obs::Verdict;
use crate::picture::Picture;

pub mod key;
pub mod keys;
pub mod layout;
pub mod rows;
mod update;
pub mod view;

pub use key::{Code, Key};
use view::Chart;

/// One of the panes.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Pane {
    /// Isobars, coast, centres, tracks.
    Chart,
    /// Highs and lows.
    Systems,
    /// Winds at watch points and stations.
    Winds,
    /// Areas of convergence.
    Convergence,
    /// The pressure-tendency table.
    Tendencies,
    /// What needs attention.
    Alerts,
    /// What came in and what became of it.
    Arrivals,
}

impl Pane {
    /// All panes in the order of the keys 1 to 7.
    pub const ALL: [Self; 7] = [
        Self::Chart,
        Self::Systems,
        Self::Winds,
        Self::Convergence,
        Self::Tendencies,
        Self::Alerts,
        Self::Arrivals,
    ];

    /// Its name.
    pub const fn word(self) -> &'static str {
        match self {
            Self::Chart => "Chart",
            Self::Systems => "Systems",
            Self::Winds => "Winds",
            Self::Convergence => "Convergence",
            Self::Tendencies => "Tendencies",
            Self::Alerts => "Alerts",
            Self::Arrivals => "Arrivals",
        }
    }

    /// The capital letter that brings it to the front.
    pub const fn letter(self) -> char {
        match self {
            Self::Chart => 'C',
            Self::Systems => 'S',
            Self::Winds => 'W',
            Self::Convergence => 'V',
            Self::Tendencies => 'T',
            Self::Alerts => 'A',
            Self::Arrivals => 'R',
        }
    }

    /// Its place in [`Pane::ALL`].
    pub const fn index(self) -> usize {
        match self {
            Self::Chart => 0,
            Self::Systems => 1,
            Self::Winds => 2,
            Self::Convergence => 3,
            Self::Tendencies => 4,
            Self::Alerts => 5,
            Self::Arrivals => 6,
        }
    }

    /// The pane `step` places on, round and round.
    #[must_use]
    pub fn stepped(self, step: usize) -> Self {
        Self::ALL.get((self.index() + step) % Self::ALL.len()).copied().unwrap_or(self)
    }
}

/// All that can happen to the desk.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Event {
    /// A key was pressed.
    Key(Key),
    /// The terminal has this size now (also sent when it may have lost its content).
    Resize {
        /// Columns.
        columns: u16,
        /// Rows.
        rows: u16,
    },
    /// A new Picture stands: the one handed in with this event.
    Picture,
    /// The clock; the desk asks for a drawing only when what it shows of the time changes.
    Tick(Instant),
    /// Something to say on the bottom line, e.g. that a file was written.
    Notice(String),
}

/// What the desk wants done.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Effect {
    /// Something visible changed: draw what differs.
    Draw,
    /// The terminal may have lost its content: draw everything anew.
    Repaint,
    /// Leave the program.
    Quit,
    /// Hand the terminal back and stop until resumed.
    Suspend,
    /// The watchkeeper acknowledges the alert of this key.
    Acknowledge(String),
    /// The watchkeeper takes back the acknowledgement of the alert of this key.
    Unacknowledge(String),
    /// The watchkeeper dismisses the system of this name as not real.
    Dismiss(String),
    /// The watchkeeper renames a system.
    Rename {
        /// Its name now.
        from: String,
        /// The chosen name.
        to: String,
    },
    /// The watchkeeper overrules what the checks made of a report.
    Overrule {
        /// What the decision is kept under, as the arrival's line says.
        decision: String,
        /// The verdict that stands; `None` takes the decision back.
        verdict: Option<Verdict>,
    },
    /// Write the situation report to a file and say where with a notice.
    Export,
}

/// How a list is ordered, filtered, and what is selected in it.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct List {
    /// Which of the pane's orders, see [`rows::orders`].
    pub order: usize,
    /// Whether it is turned round.
    pub reversed: bool,
    /// Only rows that hold this text, in any case; empty shows all.
    pub filter: String,
    /// Selected row of those shown.
    pub selected: usize,
    /// What the selected row is about: the selection stays with it when rows come and go.
    pub about: Option<String>,
}

/// What is being typed on the bottom line.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Input {
    /// The filter of the pane in front.
    Filter(String),
    /// A new name for a system.
    Rename {
        /// Its name now.
        from: String,
        /// What has been typed.
        text: String,
    },
    /// Whether to dismiss a system as not real.
    Dismiss(String),
}

/// The interface state.
#[derive(Clone, PartialEq, Debug)]
pub struct Desk {
    /// Columns of the terminal.
    pub columns: u16,
    /// Rows of the terminal.
    pub rows: u16,
    /// The present moment, as last told.
    pub now: Option<Instant>,
    /// The pane in front.
    pub focus: Pane,
    /// The last pane in front that is not the chart.
    pub list_focus: Pane,
    /// Whether the pane in front has the whole screen.
    pub alone: bool,
    /// Whether the help is open, and from which line on.
    pub help: Option<usize>,
    /// What is being typed, if anything.
    pub input: Option<Input>,
    /// What the bottom line says until the next key.
    pub notice: Option<String>,
    /// How the chart is looked at.
    pub chart: Chart,
    /// The lists, in the order of [`Pane::ALL`].
    lists: [List; 7],
}

impl Desk {
    /// A desk for a terminal of this size, the chart in front.
    pub fn new(columns: u16, rows: u16) -> Self {
        Self {
            columns,
            rows,
            now: None,
            focus: Pane::Chart,
            list_focus: Pane::Systems,
            alone: false,
            help: None,
            input: None,
            notice: None,
            chart: Chart::default(),
            lists: std::array::from_fn(|_| List::default()),
        }
    }

    /// The state of a pane's list.
    pub fn list(&self, pane: Pane) -> &List {
        &self.lists[pane.index()]
    }

    /// Where everything stands; `None` where the terminal is too small.
    pub fn layout(&self) -> Option<layout::Layout> {
        layout::layout(self.columns, self.rows, self.focus, self.list_focus, self.alone)
    }

    /// Takes in an event. `picture` is the one that is shown, if there is one.
    pub fn update(&mut self, event: Event, picture: Option<&Picture>) -> Vec<Effect> {
        update::update(self, event, picture)
    }
}

#[cfg(test)]
mod tests;
