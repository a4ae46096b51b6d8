//! What the picture says at given points, as CSV.

use std::io::{self, Write};

use super::words::from_whole_deg;
use crate::picture::{Picture, PointValues};
use crate::quantity::kt_from_m_s;
use crate::sphere::Position;
use crate::winds::Wind;

/// The header of the table of points.
pub const HEADER: &str = "time,latitude_deg,longitude_deg,pressure_hpa,pressure_error_hpa,\
change_3h_hpa,geostrophic_from_deg,geostrophic_speed_kt,gradient_from_deg,gradient_speed_kt,\
surface_from_deg,surface_speed_kt,divergence_per_s";

/// Why a list of points is refused.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum PointsError {
    /// The header lacks a column.
    #[error("points: column {0} expected in the header")]
    Column(&'static str),
    /// A row is not a place.
    #[error("points: line {line}: latitude in -90 to 90 and longitude expected, found {found}")]
    Place {
        /// Its line, from 1.
        line: usize,
        /// What stands there.
        found: String,
    },
    /// Not a CSV.
    #[error("points: {0}")]
    Form(String),
}

/// Reads `latitude_deg,longitude_deg` rows; other columns are passed over.
///
/// # Errors
///
/// [`PointsError`], naming the column or line.
pub fn read_points(text: &str) -> Result<Vec<Position>, PointsError> {
    let mut reader = csv::ReaderBuilder::new()
        .trim(csv::Trim::All)
        .comment(Some(b'#'))
        .flexible(true)
        .from_reader(text.trim_start_matches('\u{feff}').as_bytes());
    let headers = reader.headers().map_err(|error| PointsError::Form(error.to_string()))?.clone();
    let column = |name: &'static str| {
        let at = headers.iter().position(|header| header.eq_ignore_ascii_case(name));
        at.ok_or(PointsError::Column(name))
    };
    let (latitude, longitude) = (column("latitude_deg")?, column("longitude_deg")?);
    let mut points = Vec::new();
    for (row, record) in reader.records().enumerate() {
        let record = record.map_err(|error| PointsError::Form(error.to_string()))?;
        let number = |at: usize| record.get(at).and_then(|text| text.parse::<f64>().ok());
        let place = number(latitude).zip(number(longitude));
        let place = place.and_then(|(latitude, longitude)| Position::new(latitude, longitude));
        points.push(place.ok_or_else(|| PointsError::Place {
            line: row + 2,
            found: record.iter().collect::<Vec<_>>().join(","),
        })?);
    }
    Ok(points)
}

/// Writes the table: one row a point, in their order; empty where unknown, and everything empty
/// where the analysis is not to be trusted.
///
/// # Errors
///
/// Whatever the writer says.
pub fn points_csv(picture: &Picture, points: &[Position], out: &mut dyn Write) -> io::Result<()> {
    writeln!(out, "{HEADER}")?;
    for place in points {
        let found = picture.at_point(*place);
        writeln!(
            out,
            "{},{},{},{}",
            picture.valid,
            place.latitude_deg(),
            place.longitude_deg(),
            cells(&found)
        )?;
    }
    Ok(())
}

fn cells(found: &PointValues) -> String {
    let number = |value: Option<f64>, decimals: usize| {
        value.map_or_else(String::new, |value| format!("{value:.decimals$}"))
    };
    let wind = |wind: Option<Wind>| {
        wind.map_or_else(
            || ",".to_owned(),
            |wind| format!("{},{:.1}", from_whole_deg(wind), kt_from_m_s(wind.speed_m_s)),
        )
    };
    let divergence =
        found.divergence_per_s.map_or_else(String::new, |divergence| format!("{divergence:.3e}"));
    [
        number(found.pressure_hpa, 2),
        number(found.pressure_error_hpa, 2),
        number(found.change_3h_hpa, 2),
        wind(found.winds.geostrophic),
        wind(found.winds.gradient),
        wind(found.winds.surface),
        divergence,
    ]
    .join(",")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn points_are_read_whatever_the_order_of_the_columns() {
        let text = "name,longitude_deg,latitude_deg\nA,-20.5,51\nB,190,-40.25\n";
        let points = read_points(text).expect("points");
        assert_eq!(points[0], Position::clamped(51.0, -20.5));
        assert_eq!(points[1], Position::clamped(-40.25, -170.0));
        assert_eq!(read_points("a,b\n1,2\n"), Err(PointsError::Column("latitude_deg")));
        let error = read_points("latitude_deg,longitude_deg\n95,0\n").expect_err("no place");
        assert_eq!(
            error.to_string(),
            "points: line 2: latitude in -90 to 90 and longitude expected, found 95,0"
        );
    }
}
