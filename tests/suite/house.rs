//! Guard rails: the direction of the house, its top level, its words, the README's commands.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

/// The floors, lowest first. A room may use its own floor's rooms only where `neighbours` says so.
const FLOORS: &[(&[&str], bool)] = &[
    (&["field", "instant", "limits", "projection", "quantity", "report", "sphere"], true),
    (&["wire"], false),
    (&["obs"], false),
    (&["analysis"], false),
    (&["winds", "systems", "tendency", "voyage"], false),
    (&["alert"], false),
    (&["picture", "settings"], true),
    (&["desk", "paper", "screen"], true),
    (&["command", "feed", "journal", "watch"], true),
];

/// The room that stands apart, and what it may use.
const APART: (&str, &[&str]) =
    ("rehearse", &["field", "instant", "limits", "projection", "quantity", "report", "sphere"]);

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

#[expect(clippy::disallowed_methods, reason = "the test reads the source it guards")]
fn text(path: &Path) -> String {
    std::fs::read_to_string(path).unwrap_or_default()
}

#[expect(clippy::disallowed_methods, reason = "the test reads the source it guards")]
fn files(folder: &Path, out: &mut Vec<PathBuf>) {
    let mut entries: Vec<PathBuf> = std::fs::read_dir(folder)
        .expect("the folder exists")
        .map(|entry| entry.expect("an entry").path())
        .collect();
    entries.sort();
    for path in entries {
        if path.is_dir() {
            files(&path, out);
        } else {
            out.push(path);
        }
    }
}

fn sources() -> Vec<(String, PathBuf, String)> {
    let folder = root().join("src");
    let mut paths = Vec::new();
    files(&folder, &mut paths);
    paths
        .into_iter()
        .filter(|path| path.extension().is_some_and(|extension| extension == "rs"))
        .map(|path| {
            let inside = path.strip_prefix(&folder).expect("inside").to_owned();
            let room = inside.components().next().expect("a name");
            let room = room.as_os_str().to_string_lossy().trim_end_matches(".rs").to_owned();
            let content = text(&path);
            (room, inside, content)
        })
        .collect()
}

/// Every room named after `crate::` in a line, comments left out; groups are taken apart.
fn rooms_used(content: &str) -> Vec<(usize, String)> {
    let mut used = Vec::new();
    for (number, line) in content.lines().enumerate() {
        let line = line.split("//").next().unwrap_or_default();
        for piece in line.split("crate::").skip(1) {
            let names = piece
                .strip_prefix('{')
                .map_or(piece, |group| group.split('}').next().unwrap_or_default());
            let count = if piece.starts_with('{') { usize::MAX } else { 1 };
            for name in names.split(',').take(count) {
                let name: String =
                    name.trim().chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
                used.push((number + 1, name));
            }
        }
    }
    used
}

fn floor_of(room: &str) -> Option<usize> {
    FLOORS.iter().position(|(rooms, _)| rooms.contains(&room))
}

fn may_use(room: &str, other: &str) -> bool {
    if room == other || matches!(room, "main" | "lib") {
        return true;
    }
    if room == APART.0 {
        return APART.1.contains(&other);
    }
    if other == APART.0 {
        return matches!(room, "command" | "watch");
    }
    match (floor_of(room), floor_of(other)) {
        (Some(own), Some(its)) => its < own || (its == own && FLOORS[own].1),
        _ => false,
    }
}

#[test]
fn no_arrow_climbs() {
    let mut faults = Vec::new();
    for (room, path, content) in sources() {
        // Tests may look anywhere: they stand outside the house.
        let content = content.split("#[cfg(test)]\nmod tests {").next().unwrap_or_default();
        if path.file_stem().is_some_and(|stem| stem == "tests" || stem == "sample") {
            continue;
        }
        for (line, other) in rooms_used(content) {
            if !may_use(&room, &other) {
                faults.push(format!("src/{}:{line}: {room} may not use {other}", path.display()));
            }
        }
    }
    assert!(faults.is_empty(), "{}", faults.join("\n"));
}

#[test]
fn the_test_itself_sees_an_arrow_that_climbs() {
    assert!(!may_use("wire", "obs"));
    assert!(!may_use("winds", "systems"));
    assert!(!may_use("rehearse", "wire"));
    assert!(may_use("screen", "desk"));
    assert_eq!(
        rooms_used("use crate::{obs::held, wire}; // crate::screen"),
        [(1, "obs".to_owned()), (1, "wire".to_owned())]
    );
}

#[test]
fn every_room_has_its_floor() {
    let rooms: BTreeSet<String> = sources().into_iter().map(|(room, _, _)| room).collect();
    for room in &rooms {
        let known =
            floor_of(room).is_some() || matches!(room.as_str(), "main" | "lib" | "rehearse");
        assert!(known, "{room} stands on no floor");
    }
}

#[test]
#[expect(clippy::disallowed_methods, reason = "the test lists the folder it guards")]
fn the_top_level_is_what_the_house_has() {
    let allowed = [
        "Cargo.toml",
        "Cargo.lock",
        "README.md",
        "DEVELOPERS.md",
        "LICENSE",
        "src",
        "themes",
        "tests",
        "samples",
        "target",
    ];
    for entry in std::fs::read_dir(root()).expect("the project's folder") {
        let name = entry.expect("an entry").file_name().to_string_lossy().into_owned();
        assert!(name.starts_with('.') || allowed.contains(&name.as_str()), "{name} is not allowed");
    }
}

#[test]
fn the_program_is_thin() {
    let lines = text(&root().join("src/main.rs")).lines().count();
    assert!(lines < 40, "src/main.rs has {lines} lines");
}

#[test]
fn the_readme_opens_with_the_job_and_names_the_test_command_that_the_build_runs() {
    let readme = text(&root().join("README.md"));
    let run = text(&root().join(".ci/run"));
    let commands: Vec<&str> =
        readme.lines().map(str::trim).filter(|line| line.starts_with("cargo ")).collect();
    assert!(commands.len() >= 2, "the README names two commands");
    let test = commands.iter().find(|line| line.starts_with("cargo test")).expect("a test command");
    assert!(run.lines().any(|line| line.trim() == *test), ".ci/run does not call `{test}`");
}
