//! The benchmarks: they report and never fail a build by the clock.
//!
//! Without arguments all run; else those whose names are given.
#![expect(clippy::print_stdout, reason = "a benchmark reports on the terminal")]

mod accuracy;
mod analysis;
mod decode;
mod fuzz;
mod obs;
mod screen;
mod systems;

fn main() {
    let wanted: Vec<String> =
        std::env::args().skip(1).filter(|word| !word.starts_with('-')).collect();
    let asked = |name: &str| wanted.is_empty() || wanted.iter().any(|word| word == name);
    if asked("analysis") {
        analysis::run();
    }
    if asked("accuracy") {
        accuracy::run();
    }
    if asked("obs") {
        obs::run();
    }
    if asked("screen") {
        screen::run();
    }
    if asked("decode") {
        decode::run();
    }
    // Long, and no measurement: only when asked by name.
    if wanted.iter().any(|word| word == "fuzz") {
        fuzz::run(&wanted);
    }
    if asked("systems") {
        systems::run();
    }
}
