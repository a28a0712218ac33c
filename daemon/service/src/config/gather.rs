//! Where faults are gathered while the configuration is read.

use super::source::{Place, Sources, Told};
use super::{Code, Fault};

/// Faults so far, and the sources their places point into.
#[derive(Debug)]
pub(crate) struct Gather<'a> {
    pub(crate) sources: &'a Sources,
    pub(crate) faults: Vec<Fault>,
}

impl<'a> Gather<'a> {
    /// Nothing gathered yet.
    pub(crate) const fn new(sources: &'a Sources) -> Self {
        Self {
            sources,
            faults: Vec::new(),
        }
    }

    /// Adds a fault at a place.
    pub(crate) fn add(
        &mut self,
        code: Code,
        place: Place,
        key: &str,
        read: String,
        allowed: String,
    ) {
        self.faults.push(Fault {
            code,
            place: self.sources.tell(place),
            key: key.into(),
            read,
            allowed,
        });
    }

    /// What stands at a place, as it was written.
    pub(crate) fn written(&self, place: Place) -> String {
        self.sources.as_written(place)
    }

    /// A place in words.
    pub(crate) fn tell(&self, place: Place) -> Told {
        self.sources.tell(place)
    }
}
