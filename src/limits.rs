//! Every bound of the program, each with its reason.

/// Largest input file read, bytes: a day of the world's surface BUFR is a third of this.
pub const FILE_BYTES_MAX: u64 = 256 * 1024 * 1024;
/// Largest expansion of a compressed file, bytes; the same bound as for a plain one.
pub const EXPANDED_BYTES_MAX: u64 = FILE_BYTES_MAX;
/// Longest single character report, bytes: the longest seen in real feeds is below 1 kB.
pub const REPORT_BYTES_MAX: usize = 4096;
/// Complaints kept for a file; more are counted, not kept.
pub const COMPLAINTS_PER_FILE_MAX: usize = 200;
/// Hours that a report may lie in the future of the watch's clock: clocks at sea are wrong.
pub const FUTURE_HOURS_MAX: f64 = 1.0;
