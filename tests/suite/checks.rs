//! The book of check values: which of its rows the tests name, and that the rows exist.

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

#[expect(clippy::disallowed_methods, reason = "the test reads the source it counts in")]
fn collect(folder: &Path, out: &mut Vec<PathBuf>) {
    for entry in std::fs::read_dir(folder).expect("the folder exists") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            collect(&path, out);
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            out.push(path);
        }
    }
}

/// Row numbers named in a text as `CHK-012` or `CHK-012 to CHK-015`.
fn named(text: &str, out: &mut BTreeSet<u32>) {
    let mut previous: Option<(u32, usize)> = None;
    for (at, _) in text.match_indices("CHK-") {
        let rest = text.get(at + 4..).unwrap_or_default();
        let digits: String = rest.chars().take_while(char::is_ascii_digit).collect();
        let Ok(number) = digits.parse::<u32>() else { continue };
        if let Some((first, end)) = previous
            && text.get(end..at).is_some_and(|between| {
                between.split_whitespace().filter(|word| !word.starts_with('/')).eq(["to"])
            })
        {
            out.extend(first..=number);
        }
        out.insert(number);
        previous = Some((number, at + 4 + digits.len()));
    }
}

#[test]
#[expect(clippy::disallowed_methods, reason = "the test reads the source it counts in")]
fn the_tests_name_most_rows_of_the_book_of_checks() {
    let root = PathBuf::from(env!("CARGO_MANIFEST_DIR"));
    let book = std::fs::read_to_string(root.join("tests/data/checks.json")).expect("the book");
    let rows: serde_json::Value = serde_json::from_str(&book).expect("JSON");
    let known: BTreeSet<u32> = rows
        .as_array()
        .expect("a list")
        .iter()
        .filter_map(|row| row["id"].as_str()?.strip_prefix("CHK-")?.parse().ok())
        .collect();
    let mut files = Vec::new();
    collect(&root.join("src"), &mut files);
    collect(&root.join("tests"), &mut files);
    let mut found = BTreeSet::new();
    for path in files.iter().filter(|path| !path.ends_with("suite/checks.rs")) {
        named(&std::fs::read_to_string(path).expect("a file"), &mut found);
    }
    let unknown: Vec<&u32> = found.difference(&known).collect();
    assert!(unknown.is_empty(), "rows that the book does not have: {unknown:?}");
    assert!(found.len() >= 60, "{} rows are named by tests", found.len());
}

#[test]
fn ranges_and_single_rows_are_read() {
    let mut found = BTreeSet::new();
    named("CHK-001 to CHK-003, CHK-021, CHK-124 and CHK-200", &mut found);
    assert_eq!(found.into_iter().collect::<Vec<_>>(), [1, 2, 3, 21, 124, 200]);
}
