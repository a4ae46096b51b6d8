//! The suite: one binary, so that it is linked once and runs in parallel.
mod analysis_hour;
mod checks;
mod commands;
mod hostile;
mod house;
mod obs_real_hours;
mod reduction;
mod rehearse_command;
mod rehearse_observed;
mod rehearse_read;
mod rehearse_samples;
mod rehearse_truth;
mod tendency_real_day;
mod terminal;
mod wire_reference;
mod wire_samples;
