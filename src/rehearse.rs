//! Invented weather with a known truth, reported as a real feed reports, faults and all.
