//! What a rehearsal came to, for people.

use std::collections::BTreeMap;
use std::io::{self, Write};

use humward_monitor::Group;
use humward_monitor::time::Arrival;
use humward_wire::out::{Event, Instant};
use humward_wire::refusal::Refusal;

use crate::config::Loaded;

/// The account of one recording.
#[derive(Debug, Default)]
pub(super) struct Summary {
    span: Option<(Arrival, Arrival)>,
    /// Messages on topics of the configuration.
    pub(super) known: u64,
    unknown: u64,
    /// The first topic nobody here knows.
    pub(super) first_unknown: Option<String>,
    refusals: BTreeMap<&'static str, (u64, String)>,
    events: BTreeMap<String, u64>,
    points: Vec<String>,
    other_plan: Option<String>,
}

impl Summary {
    /// A record arrived.
    pub(super) fn at(&mut self, arrival: Arrival) {
        self.span = Some((self.span.map_or(arrival, |(first, _)| first), arrival));
    }

    /// A topic nobody here knows.
    pub(super) fn unknown(&mut self, topic: &str) {
        self.unknown += 1;
        self.first_unknown.get_or_insert_with(|| topic.to_owned());
    }

    /// A payload was refused.
    pub(super) fn refused(&mut self, topic: &str, refusal: &Refusal) {
        let entry = self
            .refusals
            .entry(refusal.reason.code())
            .or_insert_with(|| (0, format!("first on {topic}: {refusal}")));
        entry.0 += 1;
    }

    /// An event was printed.
    pub(super) fn event(&mut self, event: &Event) {
        let watch = event.finding.watch.as_deref().unwrap_or("asset");
        let asset = event
            .header
            .asset
            .as_ref()
            .map_or("", |asset| asset.as_str());
        *self
            .events
            .entry(format!("{asset} {watch} {}", event.transition))
            .or_default() += 1;
    }

    /// The recording ran under another configuration.
    pub(super) fn other_plan(&mut self, hash: &str) {
        self.other_plan = Some(hash.to_owned());
    }

    /// Counts the readings of each point.
    pub(super) fn readings(&mut self, config: &Loaded, groups: &[Group]) {
        for (plan, group) in config.groups().iter().zip(groups) {
            for (asset, tallies) in plan.assets().iter().zip(group.tallies()) {
                for (point, tally) in asset.spec().points.iter().zip(tallies) {
                    self.points.push(format!(
                        "{}/{}: {} readings judged, {} doubtful, {} not running",
                        asset.id(),
                        point.id(),
                        tally.judged,
                        tally.doubtful,
                        tally.not_running
                    ));
                }
            }
        }
    }

    /// Writes the account.
    pub(super) fn write(&self, to: &mut dyn Write) -> io::Result<()> {
        match self.span {
            Some((first, last)) => writeln!(
                to,
                "  {} to {}, {:.1} s, {} messages",
                Instant(first.ns()),
                Instant(last.ns()),
                last.since(first).secs(),
                self.known + self.unknown
            )?,
            None => writeln!(to, "  no record")?,
        }
        if let Some(hash) = &self.other_plan {
            writeln!(
                to,
                "  recorded under configuration {hash}, rehearsed under another"
            )?;
        }
        for point in &self.points {
            writeln!(to, "  {point}")?;
        }
        if let Some(topic) = &self.first_unknown {
            writeln!(
                to,
                "  {} messages on topics not in the configuration, first {topic}",
                self.unknown
            )?;
        }
        for (reason, (count, first)) in &self.refusals {
            writeln!(to, "  refused {count} x {reason}; {first}")?;
        }
        if self.events.is_empty() {
            writeln!(to, "  no event")?;
        }
        for (event, count) in &self.events {
            writeln!(to, "  {count} x {event}")?;
        }
        Ok(())
    }
}
