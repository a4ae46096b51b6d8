//! What a report's own content, its own past and its own track say against it (METHODS QC-1 to
//! QC-5). The neighbours are asked later, by the analysis.
//!
//! A check never changes a value. It hands out a [`Finding`] with its numbers; a slip that it can
//! put right is proposed in the finding's words, and a watchkeeper decides.

use super::catalogue::Site;
use super::series::Series;
use super::{Element, Finding, Verdict};
use crate::report::Report;

pub mod gross;
pub mod internal;
pub mod persistence;
pub mod place;
pub mod slip;
pub mod track;

/// One report with everything that its checks may look at.
#[derive(Clone, Copy, Debug)]
pub struct Case<'a> {
    /// The report.
    pub report: &'a Report,
    /// Where it was made.
    pub site: &'a Site,
    /// The station's own series around it.
    pub series: Series<'a>,
}

/// The findings of one report while they are gathered.
#[derive(Debug, Default)]
pub struct Findings {
    list: Vec<Finding>,
}

impl Findings {
    /// Notes a finding.
    pub fn add(&mut self, element: Element, verdict: Verdict, check: &str, reason: String) {
        self.list.push(Finding { element, verdict, check: check.to_owned(), reason });
    }

    /// The worst verdict on an element so far.
    pub fn verdict(&self, element: Element) -> Verdict {
        let of_element = self.list.iter().filter(|finding| finding.element == element);
        of_element.map(|finding| finding.verdict).max().unwrap_or(Verdict::Sound)
    }

    /// The findings, by element and then in the order in which the checks ran.
    pub fn into_sorted(mut self) -> Vec<Finding> {
        self.list.sort_by_key(|finding| finding.element);
        self.list
    }
}
