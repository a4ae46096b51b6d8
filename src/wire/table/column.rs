//! The columns that are known.

/// A column of a table, named as its header names it.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Column {
    /// `station`.
    Station,
    /// `kind`: land, ship, buoy or aerodrome.
    Kind,
    /// `time`, RFC 3339.
    Time,
    /// `latitude_deg`, north positive.
    Latitude,
    /// `longitude_deg`, east positive.
    Longitude,
    /// `station_height_m`.
    StationHeight,
    /// `barometer_height_m`.
    BarometerHeight,
    /// `pressure_station_hpa`.
    PressureStation,
    /// `pressure_msl_hpa`.
    PressureMsl,
    /// `characteristic`, code table 0200.
    Characteristic,
    /// `pressure_change_3h_hpa`, signed.
    PressureChange,
    /// `wind_from_deg`.
    WindFrom,
    /// `wind_speed_m_s`.
    WindSpeed,
    /// `wind_gust_m_s`.
    WindGust,
    /// `air_temperature_c`.
    AirTemperature,
    /// `dew_point_c`.
    DewPoint,
    /// `sea_temperature_c`.
    SeaTemperature,
    /// `course_deg`.
    Course,
    /// `speed_m_s`.
    Speed,
}

impl Column {
    /// Every column in the order it is written in.
    pub const ALL: [Self; 19] = [
        Self::Station,
        Self::Kind,
        Self::Time,
        Self::Latitude,
        Self::Longitude,
        Self::StationHeight,
        Self::BarometerHeight,
        Self::PressureStation,
        Self::PressureMsl,
        Self::Characteristic,
        Self::PressureChange,
        Self::WindFrom,
        Self::WindSpeed,
        Self::WindGust,
        Self::AirTemperature,
        Self::DewPoint,
        Self::SeaTemperature,
        Self::Course,
        Self::Speed,
    ];

    /// The name in a header line or as a key.
    pub const fn name(self) -> &'static str {
        match self {
            Self::Station => "station",
            Self::Kind => "kind",
            Self::Time => "time",
            Self::Latitude => "latitude_deg",
            Self::Longitude => "longitude_deg",
            Self::StationHeight => "station_height_m",
            Self::BarometerHeight => "barometer_height_m",
            Self::PressureStation => "pressure_station_hpa",
            Self::PressureMsl => "pressure_msl_hpa",
            Self::Characteristic => "characteristic",
            Self::PressureChange => "pressure_change_3h_hpa",
            Self::WindFrom => "wind_from_deg",
            Self::WindSpeed => "wind_speed_m_s",
            Self::WindGust => "wind_gust_m_s",
            Self::AirTemperature => "air_temperature_c",
            Self::DewPoint => "dew_point_c",
            Self::SeaTemperature => "sea_temperature_c",
            Self::Course => "course_deg",
            Self::Speed => "speed_m_s",
        }
    }

    /// What it holds, with its unit.
    pub const fn meaning(self) -> &'static str {
        match self {
            Self::Station => "station",
            Self::Kind => "kind of station",
            Self::Time => "time of observation",
            Self::Latitude => "latitude, degrees, north positive",
            Self::Longitude => "longitude, degrees, east positive",
            Self::StationHeight => "station height, m",
            Self::BarometerHeight => "barometer height, m",
            Self::PressureStation => "station pressure, hPa",
            Self::PressureMsl => "sea-level pressure, hPa",
            Self::Characteristic => "characteristic of the tendency",
            Self::PressureChange => "pressure change in 3 h, hPa",
            Self::WindFrom => "direction the wind blows from, degrees",
            Self::WindSpeed => "wind speed, m/s",
            Self::WindGust => "highest gust, m/s",
            Self::AirTemperature => "air temperature, C",
            Self::DewPoint => "dew point, C",
            Self::SeaTemperature => "sea temperature, C",
            Self::Course => "course made good, degrees",
            Self::Speed => "speed made good, m/s",
        }
    }

    /// The column of a name, written in any case, blanks about it ignored.
    pub(crate) fn named(name: &[u8]) -> Option<Self> {
        let name = name.trim_ascii();
        // Told apart by length first: most text is no column.
        if !(4..=22).contains(&name.len()) || !name.first().is_some_and(u8::is_ascii_alphabetic) {
            return None;
        }
        Self::ALL.into_iter().find(|column| column.name().as_bytes().eq_ignore_ascii_case(name))
    }
}
