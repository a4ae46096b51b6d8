//! Section 3: 24-hour change and gusts; the rest is passed over (METHODS COD-5).

use super::section_1::Section1;
use crate::wire::group::{Figures, Group, Groups, tenths};
use crate::wire::listener::Listener;

/// What section 3 has given so far.
#[derive(Debug, Default)]
pub(crate) struct Section3 {
    /// Whether the gust is the one of the last ten minutes, which goes before others.
    gust_is_latest: bool,
    /// Whether the next group belongs to the one before it.
    next_belongs: bool,
}

impl Section3 {
    /// One group; a `00fff` that belongs to it is taken from `groups`.
    pub(crate) fn group<'a, L: Listener>(
        &mut self,
        group: Group<'a>,
        groups: &mut Groups<'a>,
        first: &mut Section1<'a>,
        listener: &mut L,
    ) {
        if group.text == b"80000" {
            listener.part(group, || "regional groups follow".to_owned());
            return;
        }
        if !group.is_coded(5) {
            listener.complain(group, "section 3: five figures or solidi", || {
                "the group cannot be read".to_owned()
            });
            return;
        }
        if std::mem::take(&mut self.next_belongs) {
            listener.part(group, || "radiation".to_owned());
            return;
        }
        match group.text {
            // 55407, 55408, 55507, 55508 announce that the next group is a radiation (regulation
            // 12.4.7.1.2), whatever it looks like.
            b"55407" | b"55408" | b"55507" | b"55508" => {
                self.next_belongs = true;
                listener.part(group, || "radiation follows".to_owned());
            }
            [b'5', sign @ (b'8' | b'9'), ..] => match group.figures(2, 5) {
                Figures::Value(value) => {
                    let value = i32::try_from(value).unwrap_or(0);
                    let change_hpa = tenths(if *sign == b'8' { value } else { -value });
                    first.report.pressure_change_24h_hpa = Some(change_hpa);
                    listener
                        .part(group, || format!("pressure change in 24 h {change_hpa:+.1} hPa"));
                }
                _ => listener.part(group, || "24-hour pressure change not reported".to_owned()),
            },
            [b'9', b'1', kind @ (b'0' | b'1'), ..] => {
                self.gust(*kind == b'0', group, groups, first, listener);
            }
            [b'9', b'1', b'2'..=b'4', ..] => {
                listener.part(group, || "mean wind of a period".to_owned());
                passed_speed(group, groups, listener);
            }
            [b'9', b'0', ..] => {
                listener.part(group, || "time or period of what follows".to_owned());
            }
            [b'9', ..] => listener.part(group, || "special phenomena".to_owned()),
            [b'1', ..] => listener.part(group, || "highest temperature".to_owned()),
            [b'2', ..] => listener.part(group, || "lowest temperature".to_owned()),
            [b'3', ..] => listener.part(group, || "state of the ground".to_owned()),
            [b'4', ..] => listener.part(group, || "snow".to_owned()),
            [b'5', ..] => listener.part(group, || "sunshine, radiation, evaporation".to_owned()),
            [b'6' | b'7', ..] => listener.part(group, || "precipitation".to_owned()),
            [b'8', ..] => listener.part(group, || "cloud layer".to_owned()),
            _ => listener.part(group, || "regional".to_owned()),
        }
    }

    /// `910ff` gust of the last ten minutes, `911ff` of the period (code table 3778).
    fn gust<'a, L: Listener>(
        &mut self,
        latest: bool,
        group: Group<'a>,
        groups: &mut Groups<'a>,
        first: &mut Section1<'a>,
        listener: &mut L,
    ) {
        let mut speed = group.figures(3, 5);
        let more = speed_follows(group, groups);
        if let Some(more) = more {
            speed = more.figures(2, 5);
        }
        let name =
            if latest { "highest gust of the last 10 min" } else { "highest gust of the period" };
        match (speed, first.unit) {
            (Figures::Value(coded), Some(unit)) => {
                if latest || !self.gust_is_latest {
                    first.report.wind_gust_m_s = Some(unit.speed_m_s(coded));
                    self.gust_is_latest = latest;
                }
                listener.part(group, || format!("{name}: {}", unit.words(coded)));
                if let Some(more) = more {
                    listener.part(more, || format!("speed {}", unit.words(coded)));
                }
            }
            (Figures::Value(_), None) => {
                listener.part(group, || format!("{name} in an unknown unit: not used"));
            }
            _ => listener.part(group, || format!("{name}: not reported")),
        }
    }
}

/// The `00fff` that follows a speed of 99.
fn speed_follows<'a>(group: Group<'a>, groups: &mut Groups<'a>) -> Option<Group<'a>> {
    let next = groups.peek()?;
    let follows = group.figures(3, 5) == Figures::Value(99)
        && next.text.starts_with(b"00")
        && next.is_coded(5);
    if follows { groups.next() } else { None }
}

fn passed_speed<'a, L: Listener>(group: Group<'a>, groups: &mut Groups<'a>, listener: &mut L) {
    if let Some(more) = speed_follows(group, groups) {
        listener.part(more, || "its speed".to_owned());
    }
}
