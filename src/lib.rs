//! glasskeeper keeps the watch on the barometer for a whole region.
//!
//! **The law of the loop:** the [`picture::Picture`] is a pure function of the set of held reports,
//! the watchkeeper's decisions, the configuration and the time. The order of arrival, restarts and
//! crashes cannot change it.
//!
//! The rooms stand in order of dependence, the ground first; a room may use any room before it and
//! its neighbours on the ground, never one after it. `tests/suite/house.rs` keeps this.

// The ground.
pub mod field;
pub mod instant;
pub mod limits;
pub mod projection;
pub mod quantity;
pub mod report;
pub mod sphere;

// The reports.
pub mod wire;

pub mod obs;

// The analysis.
pub mod analysis;

// What follows from it.
pub mod alert;
pub mod systems;
pub mod tendency;
pub mod winds;

// The one fold.
pub mod picture;
pub mod settings;

// The view: reads the Picture, computes nothing.
pub mod desk;
pub mod paper;
pub mod screen;

// The rim: files, threads and the clock.
pub mod command;
pub mod feed;
pub mod journal;
pub mod watch;

// Apart from the house: invented weather with a known truth, written as real feeds are.
pub mod rehearse;
