//! The names of measures in the configuration.

use humward_monitor::plan::{Measure, Quantity, Race};

/// A measure as it is named, before a point resolves bands to their index.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) enum MeasureName {
    /// One that every point has, with its unit.
    Plain(Measure, Quantity),
    /// The band of this name.
    Band(String),
    /// The envelope line of one bearing part.
    Bearing(Race),
    /// The envelope lines of all four, each a watch of its own.
    AnyBearing,
}

const PLAIN: [(&str, Measure, Quantity); 7] = [
    ("velocity_rms", Measure::VelocityRms, Quantity::VelocityRms),
    (
        "velocity_peak",
        Measure::VelocityPeak,
        Quantity::VelocityPeak,
    ),
    (
        "acceleration_rms",
        Measure::AccelerationRms,
        Quantity::AccelerationRms,
    ),
    (
        "acceleration_peak",
        Measure::AccelerationPeak,
        Quantity::AccelerationPeak,
    ),
    ("crest", Measure::Crest, Quantity::Ratio),
    ("kurtosis", Measure::Kurtosis, Quantity::Ratio),
    (
        "high_band_rms",
        Measure::HighBandRms,
        Quantity::AccelerationRms,
    ),
];

impl MeasureName {
    /// Reads a name; `None` for anything that is none.
    pub(crate) fn parse(text: &str) -> Option<Self> {
        if let Some(band) = text.strip_prefix("band.") {
            return (!band.is_empty()).then(|| Self::Band(band.into()));
        }
        if let Some(race) = text.strip_prefix("bearing.") {
            return match race {
                "any" => Some(Self::AnyBearing),
                _ => Race::ALL
                    .into_iter()
                    .find(|known| known.text() == race)
                    .map(Self::Bearing),
            };
        }
        PLAIN
            .into_iter()
            .find(|(name, ..)| *name == text)
            .map(|(_, measure, quantity)| Self::Plain(measure, quantity))
    }
}

#[cfg(test)]
mod tests {
    use humward_monitor::plan::{Measure, Quantity, Race};

    use super::MeasureName;

    #[test]
    fn measures_are_read_by_name_and_nothing_else_is_one() {
        assert_eq!(
            MeasureName::parse("velocity_rms"),
            Some(MeasureName::Plain(
                Measure::VelocityRms,
                Quantity::VelocityRms
            ))
        );
        assert_eq!(
            MeasureName::parse("band.vanes"),
            Some(MeasureName::Band("vanes".into()))
        );
        assert_eq!(
            MeasureName::parse("bearing.cage"),
            Some(MeasureName::Bearing(Race::Cage))
        );
        assert_eq!(
            MeasureName::parse("bearing.any"),
            Some(MeasureName::AnyBearing)
        );
        for wrong in [
            "",
            "velocity",
            "band.",
            "bearing.",
            "bearing.ball",
            "Velocity_rms",
        ] {
            assert_eq!(MeasureName::parse(wrong), None, "{wrong:?}");
        }
    }
}
