//! A long run of the decoders over damaged input, the same on every machine.
//!
//! Runs only when asked: `cargo bench --bench bench -- fuzz executions=10000000 [forms=metar,bufr]`.
//! A finding is printed with its bytes, so that it can become a test in `tests/suite/hostile.rs`.

use std::io::Write as _;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant as Clock};

use flate2::Compression;
use flate2::write::GzEncoder;
use glasskeeper::instant::Instant;
use glasskeeper::wire::{Context, explain, read};

/// The decoders, and the samples that each is fed with.
const FORMS: [(&str, &[&str]); 9] = [
    ("land", &["land_bulletin.txt"]),
    ("ship", &["ship_bulletin.txt", "mobile.txt"]),
    ("buoy", &["buoy.txt"]),
    ("metar", &["aerodromes.txt"]),
    ("csv", &["rows.csv"]),
    ("json", &["lines.jsonl"]),
    ("gzip", &[]),
    ("bufr", &[]),
    ("file", &["mixed.bin", "two_members.gz"]),
];

/// Marsaglia's generator of 64 bits (2003), so that a run can be repeated from its seed.
struct Dice(u64);

impl Dice {
    fn next(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0
    }

    fn below(&mut self, limit: usize) -> usize {
        usize::try_from(self.next() % limit.max(1) as u64).unwrap_or(0)
    }
}

#[expect(clippy::disallowed_methods, reason = "a benchmark reads its data")]
fn bytes_of(path: PathBuf) -> Vec<u8> {
    std::fs::read(path).expect("the data are there")
}

#[expect(clippy::disallowed_methods, reason = "a benchmark reads its data")]
fn messages(folder: &Path) -> Vec<Vec<u8>> {
    let mut paths: Vec<PathBuf> = std::fs::read_dir(folder.join("bufr/made"))
        .expect("the data are there")
        .map(|entry| entry.expect("an entry").path())
        .collect();
    paths.sort();
    paths.into_iter().map(bytes_of).collect()
}

/// Pieces that one execution damages and reads: single reports under their mark, as a rule.
fn seeds(form: &str, files: &[&str]) -> Vec<Vec<u8>> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data");
    if form == "bufr" {
        return messages(&folder);
    }
    if form == "gzip" {
        let text = bytes_of(folder.join("wire/mobile.txt"));
        let mut encoder = GzEncoder::new(Vec::new(), Compression::fast());
        encoder.write_all(&text).expect("memory");
        return vec![encoder.finish().expect("memory")];
    }
    let mut seeds = Vec::new();
    for file in files {
        let whole = bytes_of(folder.join("wire").join(file));
        let mark: &[u8] = match form {
            "land" => b"AAXX 15124 ",
            "ship" if *file == "ship_bulletin.txt" => b"BBXX ",
            "csv" => whole.split_inclusive(|&byte| byte == b'\n').next().unwrap_or_default(),
            _ => b"",
        };
        match form {
            "file" => seeds.push(whole),
            "csv" | "json" => seeds.extend(
                whole.split(|&byte| byte == b'\n').map(|line| [mark, line, b"\n"].concat()),
            ),
            _ => seeds.extend(
                whole.split(|&byte| byte == b'=').map(|report| [mark, report, b"=\n"].concat()),
            ),
        }
    }
    seeds
}

/// Damages a few places: bytes changed, lost, doubled, moved, or taken from another sample.
fn damage(bytes: &mut Vec<u8>, other: &[u8], dice: &mut Dice) {
    const TELLING: &[u8] = b"0123456789/=\n\r\x01\x03 {}[]\",:-.AZMQSRPVKT\x00\xff";
    for _ in 0..=dice.below(6) {
        if bytes.is_empty() {
            bytes.push(b' ');
        }
        let at = dice.below(bytes.len());
        match dice.below(8) {
            0 => bytes[at] = u8::try_from(dice.next() & 0xff).unwrap_or(0),
            1 | 2 => bytes[at] = TELLING[dice.below(TELLING.len())],
            3 => bytes[at] ^= 1 << dice.below(8),
            4 => {
                bytes.remove(at);
            }
            5 => bytes.insert(at, TELLING[dice.below(TELLING.len())]),
            6 => {
                let length = dice.below(12).min(bytes.len() - at);
                let piece: Vec<u8> = bytes.get(at..at + length).unwrap_or_default().to_vec();
                let to = dice.below(bytes.len());
                bytes.splice(to..to, piece);
            }
            _ => {
                let from = dice.below(other.len().max(1));
                let piece = other.get(from..).unwrap_or_default();
                let piece = piece.get(..dice.below(24)).unwrap_or(piece).to_vec();
                bytes.splice(at..at, piece);
            }
        }
        bytes.truncate(16_384);
    }
}

fn good(bytes: &[u8], context: Context, explained_too: bool) -> bool {
    let reading = read(bytes, &context);
    let count = reading.bytes;
    let mut reports = 0;
    if explained_too {
        explain(bytes, &context, &mut |explained| {
            reports += usize::from(explained.report().is_some());
        });
    }
    count.reports + count.envelope + count.refused == count.total
        && (count.refused == 0 || !reading.complaints.is_empty())
        && (!explained_too || reports == reading.reports.len())
}

#[expect(clippy::disallowed_methods, reason = "a benchmark measures")]
fn now() -> Clock {
    Clock::now()
}

/// Runs as many executions of each decoder as the words ask for.
pub(crate) fn run(words: &[String]) {
    let value = |key: &str| words.iter().find_map(|word| word.strip_prefix(key));
    let executions: usize =
        value("executions=").and_then(|number| number.parse().ok()).unwrap_or(20_000);
    let chosen = value("forms=").unwrap_or("");
    let context = Context { received: Instant::from_unix_s(1_768_480_000) };
    println!("fuzz: {executions} executions a decoder");
    for (form, files) in FORMS {
        if !chosen.is_empty() && !chosen.split(',').any(|name| name == form) {
            continue;
        }
        let seeds = seeds(form, files);
        let mut dice = Dice(0x9e37_79b9_7f4a_7c15);
        let mut bytes = Vec::new();
        let (mut findings, mut slowest, mut last) = (0, Duration::ZERO, now());
        let begun = last;
        for execution in 0..executions {
            bytes.clear();
            bytes.extend_from_slice(&seeds[dice.below(seeds.len())]);
            let other = &seeds[dice.below(seeds.len())];
            damage(&mut bytes, other, &mut dice);
            let explained_too = execution % 16 == 0;
            let outcome = catch_unwind(AssertUnwindSafe(|| good(&bytes, context, explained_too)));
            if !matches!(outcome, Ok(true)) {
                findings += 1;
                if findings <= 5 {
                    println!(
                        "  FINDING in {form}, execution {execution}: {}",
                        bytes.escape_ascii()
                    );
                }
            }
            let time = now();
            slowest = slowest.max(time - last);
            last = time;
        }
        let rate = executions as f64 / begun.elapsed().as_secs_f64().max(1e-9);
        println!("  {form:<6} {findings} findings, {rate:>9.0} a second, slowest {slowest:?}");
    }
}
