//! What the reports themselves say about where a fixed station stands: BUFR and tables teach the
//! catalogue. A pure function of the held set: each copy counts once.

use std::cmp::Ordering;

use super::{Copy, Key, Slot};
use crate::report::{Form, Platform};
use crate::sphere::Position;

/// One place that reports gave for a station.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Place {
    /// Where.
    pub position: Position,
    /// Height of the ground, m.
    pub station_height_m: Option<f64>,
    /// Height of the barometer, m.
    pub barometer_height_m: Option<f64>,
    /// The form that said so.
    pub form: Form,
}

impl Place {
    /// What a copy says about its station; `None` for what moves and for reports without a place.
    pub(super) fn taught_by(key: &Key, copy: &Copy) -> Option<Self> {
        let fixed = matches!(key.platform, Platform::Land | Platform::Aerodrome);
        if !fixed || copy.form() == Form::Mobile {
            return None;
        }
        Some(Self {
            position: copy.position()?,
            station_height_m: copy.value(Slot::StationHeight),
            barometer_height_m: copy.value(Slot::BarometerHeight),
            form: copy.form(),
        })
    }

    fn order(&self, other: &Self) -> Ordering {
        let key = |place: &Self| {
            [
                place.position.latitude_deg(),
                place.position.longitude_deg(),
                place.station_height_m.unwrap_or(f64::INFINITY),
                place.barometer_height_m.unwrap_or(f64::INFINITY),
            ]
        };
        let pairs = key(self).into_iter().zip(key(other));
        pairs
            .map(|(a, b)| a.total_cmp(&b))
            .find(|order| order.is_ne())
            .unwrap_or(Ordering::Equal)
            .then_with(|| self.form.cmp(&other.form))
    }
}

/// All places that reports gave for a station, each with the number of copies that gave it.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Places {
    /// In the order of their values.
    counted: Vec<(Place, u32)>,
}

impl Places {
    pub(super) fn add(&mut self, place: Place) {
        match self.counted.binary_search_by(|(held, _)| held.order(&place)) {
            Ok(at) => {
                if let Some((_, count)) = self.counted.get_mut(at) {
                    *count = count.saturating_add(1);
                }
            }
            Err(at) => self.counted.insert(at, (place, 1)),
        }
    }

    pub(super) fn remove(&mut self, place: &Place) {
        if let Ok(at) = self.counted.binary_search_by(|(held, _)| held.order(place))
            && let Some((_, count)) = self.counted.get_mut(at)
        {
            *count = count.saturating_sub(1);
            if *count == 0 {
                self.counted.remove(at);
            }
        }
    }

    pub(super) fn is_empty(&self) -> bool {
        self.counted.is_empty()
    }

    /// The place that most copies give; of equal ones the first by value.
    pub fn most_given(&self) -> Option<&Place> {
        let best = self
            .counted
            .iter()
            .max_by(|(a, count), (b, other)| count.cmp(other).then_with(|| b.order(a)));
        best.map(|(place, _)| place)
    }

    /// Every place with its count.
    pub fn all(&self) -> impl Iterator<Item = (&Place, u32)> {
        self.counted.iter().map(|(place, count)| (place, *count))
    }
}
