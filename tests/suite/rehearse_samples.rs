//! The samples are what their scenarios give, and small; `UPDATE=1` writes them anew.

use std::io::Read;
use std::path::PathBuf;

use glasskeeper::rehearse::{Rehearsal, Scenario, Truth};

fn samples() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("samples")
}

fn rehearsal(name: &str) -> Rehearsal {
    let scenario = Scenario::built_in(name).expect("a built-in scenario");
    let start = scenario.start;
    Rehearsal::new(scenario, start)
}

/// Compressors may differ from version to version; the text may not.
fn expanded(name: &str, bytes: &[u8]) -> Vec<u8> {
    if PathBuf::from(name).extension().is_none_or(|ending| ending != "gz") {
        return bytes.to_vec();
    }
    let mut text = Vec::new();
    flate2::read::GzDecoder::new(bytes).read_to_end(&mut text).expect("a gzip file");
    text
}

#[test]
#[expect(clippy::disallowed_methods, reason = "compares files with what is made")]
fn samples_are_what_their_scenarios_give() {
    let update = std::env::var("UPDATE").is_ok_and(|value| value == "1");
    for name in Scenario::built_in_names() {
        let rehearsal = rehearsal(name);
        let feed = samples().join(name).join("feed");
        let truth_file = samples().join(format!("{name}-truth.json"));
        let truth = serde_json::to_string(&rehearsal.truth()).expect("truth as JSON") + "\n";
        if update {
            if feed.exists() {
                std::fs::remove_dir_all(&feed).expect("the old feed goes");
            }
            std::fs::create_dir_all(&feed).expect("a folder");
            for file in rehearsal.files() {
                std::fs::write(feed.join(&file.name), &file.bytes).expect("a file");
            }
            std::fs::write(&truth_file, &truth).expect("the truth");
        }
        let mut total = 0;
        let mut names = Vec::new();
        for file in rehearsal.files() {
            let held = std::fs::read(feed.join(&file.name)).expect("a sample file");
            total += held.len();
            assert!(
                expanded(&file.name, &held) == expanded(&file.name, &file.bytes),
                "{name}: {} differs; UPDATE=1 writes it anew",
                file.name
            );
            names.push(file.name);
        }
        let mut found: Vec<String> = std::fs::read_dir(&feed)
            .expect("the feed")
            .map(|entry| entry.expect("an entry").file_name().to_string_lossy().into_owned())
            .collect();
        found.sort();
        names.sort();
        assert_eq!(found, names, "{name}: the feed holds other files");
        assert!(total < 400_000, "{name}: {total} bytes");
        let held = std::fs::read_to_string(&truth_file).expect("the truth");
        let held: Truth = serde_json::from_str(&held).expect("truth as JSON");
        assert!(held == rehearsal.truth(), "{name}: the truth differs");
    }
}
