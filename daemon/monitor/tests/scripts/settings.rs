//! The plan of a script: assets, points and watches, each with defaults that keep headers short.

use std::sync::Arc;

use humward_monitor::{
    plan::{
        AssetPlan, AssetSpec, BandPlan, BandSpec, Calibration, Edges, GroupPlan, Limits, Measure,
        Persistence, PointPlan, PointSpec, Quantity, Race, RunningRule, SpeedRange, StartingRule,
        WatchPlan, WatchSpec, ZoneLimits,
    },
    time::Span,
};
use humward_signal::bearing::BearingOrders;
use humward_wire::id::Id;

use crate::language::Words;

/// What the header says, and what later plan commands make of it.
#[derive(Debug, Clone)]
pub(crate) struct Settings {
    /// Time from a block's last sample to its arrival, s.
    pub(crate) lag: f64,
    /// Length of a block, s.
    pub(crate) block: f64,
    /// Sample rate of blocks, samples/s.
    pub(crate) rate: f64,
    common: AssetSpec,
    assets: Vec<AssetSpec>,
}

/// An id, which must be sound.
pub(crate) fn id(text: &str) -> Id {
    Id::new(text).unwrap_or_else(|fault| panic!("{text:?}: {fault:?}"))
}

impl Default for Settings {
    fn default() -> Self {
        Self {
            lag: 0.25,
            block: 1.0,
            rate: 5120.0,
            common: AssetSpec {
                id: id("P-103A"),
                name: "cooling water pump, pump house 2".into(),
                speed: SpeedRange {
                    lowest: 1000.0,
                    nominal: 1500.0,
                    highest: 3000.0,
                },
                running: RunningRule {
                    from_rpm: 300.0,
                    from_mm_s: 0.5,
                    speed_valid: Span::from_secs(3600),
                },
                run_signal: None,
                starting: StartingRule::USUAL,
                zones: None,
                reading_every: Span::from_secs(10),
                status_every: Span::from_secs(3600),
                sensor_after: Span::from_secs(60),
                points: Vec::new(),
                watches: Vec::new(),
            },
            assets: Vec::new(),
        }
    }
}

impl Settings {
    /// Reads the header.
    pub(crate) fn of(lines: &[Words]) -> Self {
        let mut settings = Self::default();
        for line in lines {
            settings.set(line);
        }
        settings
    }

    /// Takes in one setting.
    pub(crate) fn set(&mut self, words: &Words) {
        let span = |place| Span::from_secs_f64(words.number(place));
        let every = match words.at(0) {
            "lag" => return self.lag = words.number(1),
            "block" => return self.block = words.number(1),
            "rate" => return self.rate = words.number(1),
            "asset" => return self.asset(words),
            "point" => return self.point(words),
            "watch" => return self.watch(words),
            "without" => return self.without(words),
            _ => self,
        };
        assert!(
            every.assets.is_empty(),
            "{words:?}: stands before the first asset, point or watch"
        );
        let common = &mut every.common;
        match words.at(0) {
            "reading" => common.reading_every = span(1),
            "status" => common.status_every = span(1),
            "sensor_after" => common.sensor_after = span(1),
            "speed_valid" => common.running.speed_valid = span(1),
            "running_from" => {
                (common.running.from_rpm, common.running.from_mm_s) =
                    (words.number(1), words.number(2));
            }
            "starting" => {
                common.starting = StartingRule {
                    factor: words.number(1),
                    after: span(2),
                    signal_for: span(3),
                };
            }
            "run_signal" => common.run_signal = Some(id(words.at(1))),
            "zones" => {
                let borders = [1, 2, 3].map(|place| words.number(place));
                common.zones =
                    Some(ZoneLimits::new("script", "borders of this script", borders).unwrap());
            }
            other => panic!("{other:?} is no setting"),
        }
    }

    fn asset(&mut self, words: &Words) {
        self.assets.push(AssetSpec {
            id: id(words.at(1)),
            name: words.at(2).into(),
            ..self.common.clone()
        });
    }

    fn last(&mut self) -> &mut AssetSpec {
        if self.assets.is_empty() {
            self.assets.push(self.common.clone());
        }
        self.assets.last_mut().unwrap()
    }

    fn point(&mut self, words: &Words) {
        let count = words.read("count_per_g").map(Calibration::CountPerG);
        let millivolt = words
            .read("millivolt_per_g")
            .map(Calibration::MillivoltPerG);
        let bands = words.numbers("band_orders").map(|[low, high]| {
            let spec = BandSpec {
                name: "vane-pass".into(),
                edges: Edges::Orders(low, high),
                quantity: Quantity::VelocityRms,
            };
            BandPlan::new(spec).unwrap()
        });
        let spec = PointSpec {
            id: id(words.at(1)),
            name: words.at(2).into(),
            source: id(words.option("source").unwrap_or(words.at(1))),
            channel: words.read("channel").unwrap_or(0),
            rate_hz: None,
            frame: words.read("frame").unwrap_or(4096),
            calibration: count.or(millivolt).unwrap_or(Calibration::FromUnit),
            range_ms2: words.read("range"),
            noise_ug_rthz: None,
            velocity_from_hz: 10.0,
            bearing: words
                .numbers("bearing")
                .map(|[outer, inner, element, cage]| BearingOrders {
                    outer,
                    inner,
                    element,
                    cage,
                }),
            envelope_hz: words.numbers("envelope").map(|[low, high]| (low, high)),
            bands: bands.into_iter().collect(),
        };
        let plan = PointPlan::new(spec).unwrap_or_else(|faults| panic!("{words:?}: {faults:?}"));
        let points = &mut self.last().points;
        match points.iter().position(|point| point.id() == plan.id()) {
            Some(place) => points[place] = plan,
            None => points.push(plan),
        }
    }

    fn watch(&mut self, words: &Words) {
        if self.last().points.is_empty() {
            self.point(&Words::of("point drive-end \"pump drive end\""));
        }
        let asset = self.last();
        let (measure, quantity) = measure(words.option("of").unwrap_or("velocity_rms"));
        let place = words.option("at").map_or(0, |point| {
            let found = asset
                .points
                .iter()
                .position(|known| known.id().as_str() == point);
            found.unwrap_or_else(|| panic!("{words:?}: no point {point}"))
        });
        let after = |name: &str| {
            let text = words.option(name).unwrap_or("3 readings");
            Persistence::parse(text).unwrap_or_else(|fault| panic!("{words:?}: {name}: {fault}"))
        };
        let limits = Limits::new(
            words.read("alert"),
            words.read("danger"),
            words.read("deadband").unwrap_or(0.0),
        );
        let spec = WatchSpec {
            name: words.at(1).into(),
            point: place,
            measure,
            quantity,
            limits: limits.unwrap_or_else(|faults| panic!("{words:?}: {faults:?}")),
            at_least_ms2: words.read("at_least"),
            alert_after: after("alert_after"),
            danger_after: after("danger_after"),
            clear_after: after("clear_after"),
            source: String::new(),
        };
        let point = asset.points[place].id().clone();
        let plan = WatchPlan::new(spec, point.as_str()).unwrap();
        match asset
            .watches
            .iter()
            .position(|known| known.full_name() == plan.full_name())
        {
            Some(place) => asset.watches[place] = plan,
            None => asset.watches.push(plan),
        }
    }

    fn without(&mut self, words: &Words) {
        let name = words.at(2);
        match words.at(1) {
            "asset" => self.assets.retain(|asset| asset.id.as_str() != name),
            "watch" => {
                for asset in &mut self.assets {
                    asset.watches.retain(|watch| watch.full_name() != name);
                }
            }
            other => panic!("without {other:?} is not known"),
        }
    }

    /// The checked plan.
    pub(crate) fn plan(&self) -> Arc<GroupPlan> {
        let asset = |spec: &AssetSpec| {
            AssetPlan::new(spec.clone()).unwrap_or_else(|faults| panic!("{}: {faults:?}", spec.id))
        };
        let assets = self.assets.iter().map(asset).collect();
        Arc::new(GroupPlan::new(id("pump-house-2"), assets).unwrap())
    }

    /// The asset and source a command means: `to asset/source`, `to source`, or the first of each.
    pub(crate) fn target(&self, words: &Words) -> (Id, Id) {
        let first = &self.assets[0];
        match words
            .option("to")
            .map(|to| to.split_once('/').unwrap_or(("", to)))
        {
            Some(("", source)) => (first.id.clone(), id(source)),
            Some((asset, source)) => (id(asset), id(source)),
            None => (first.id.clone(), first.points[0].spec().source.clone()),
        }
    }
}

fn measure(name: &str) -> (Measure, Quantity) {
    match name {
        "velocity_rms" => (Measure::VelocityRms, Quantity::VelocityRms),
        "velocity_peak" => (Measure::VelocityPeak, Quantity::VelocityPeak),
        "acceleration_rms" => (Measure::AccelerationRms, Quantity::AccelerationRms),
        "high_band_rms" => (Measure::HighBandRms, Quantity::AccelerationRms),
        "kurtosis" => (Measure::Kurtosis, Quantity::Ratio),
        "band" => (Measure::Band(0), Quantity::VelocityRms),
        "outer" => (Measure::Bearing(Race::Outer), Quantity::Decibel),
        "inner" => (Measure::Bearing(Race::Inner), Quantity::Decibel),
        "element" => (Measure::Bearing(Race::Element), Quantity::Decibel),
        "cage" => (Measure::Bearing(Race::Cage), Quantity::Decibel),
        other => panic!("{other:?} is no measure"),
    }
}
