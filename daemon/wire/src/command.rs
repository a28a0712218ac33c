//! Commands: what people and systems ask of the daemon.
//!
//! In: a JSON object or a CBOR map, from `command/<sender>/<asset>`. Out: a command with everything its verb needs;
//! whether it is allowed now is the judge's to say. Verbs that change something name who asks (`by`), and those about
//! an occurrence name it, so that a late command cannot hit the next one.

use alloc::string::String;

use crate::field;
use crate::id::Id;
use crate::refusal::{Reason, Refusal};

/// What is asked.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Verb {
    /// Publish the status now.
    Status,
    /// Publish evidence: of an event when `event` names one, else of now.
    Evidence,
    /// Publish events again, from `from_n` to `to_n` or the last.
    Resend,
    /// Take note of an occurrence.
    Acknowledge,
    /// Hide a watch until a time.
    Shelve,
    /// Show a watch again.
    Unshelve,
    /// Let go of a latched occurrence.
    Reset,
    /// Take the asset, or one watch, out of service.
    OutOfService,
    /// Put the asset, or one watch, back in service.
    ReturnToService,
    /// Accept a known defect until a time.
    AcceptDefect,
    /// The machine was changed: archive its normal and learn a new one.
    MachineChanged,
    /// Sign off a learned normal.
    SignOff,
}

/// One command.
#[derive(Clone, Debug, PartialEq)]
pub struct Command {
    /// Chosen by the sender; the reply carries it.
    pub id: Id,
    /// What is asked; the key is `do`.
    pub verb: Verb,
    /// The occurrence it is about.
    pub occurrence: Option<Id>,
    /// The watch it is about.
    pub watch: Option<Id>,
    /// The event it is about.
    pub event: Option<Id>,
    /// The measuring point it is about.
    pub point: Option<Id>,
    /// Who asks.
    pub by: Option<String>,
    /// Not to be done from this time on, ns since 1970 UTC.
    pub expires: Option<i64>,
    /// How long the effect lasts, ns since 1970 UTC.
    pub until: Option<i64>,
    /// First event wanted.
    pub from_n: Option<u64>,
    /// Last event wanted.
    pub to_n: Option<u64>,
    /// Why, in the asker's words.
    pub note: Option<String>,
}

impl Verb {
    /// Every verb.
    pub const ALL: [Verb; 12] = [
        Verb::Status,
        Verb::Evidence,
        Verb::Resend,
        Verb::Acknowledge,
        Verb::Shelve,
        Verb::Unshelve,
        Verb::Reset,
        Verb::OutOfService,
        Verb::ReturnToService,
        Verb::AcceptDefect,
        Verb::MachineChanged,
        Verb::SignOff,
    ];

    /// The verb as it stands in commands.
    #[must_use]
    pub const fn text(self) -> &'static str {
        match self {
            Verb::Status => "status",
            Verb::Evidence => "evidence",
            Verb::Resend => "resend",
            Verb::Acknowledge => "acknowledge",
            Verb::Shelve => "shelve",
            Verb::Unshelve => "unshelve",
            Verb::Reset => "reset",
            Verb::OutOfService => "out-of-service",
            Verb::ReturnToService => "return-to-service",
            Verb::AcceptDefect => "accept-defect",
            Verb::MachineChanged => "machine-changed",
            Verb::SignOff => "sign-off",
        }
    }

    /// The verb a text names.
    #[must_use]
    pub fn from_text(text: &str) -> Option<Verb> {
        Verb::ALL.into_iter().find(|verb| verb.text() == text)
    }

    /// Keys the verb cannot do without, beside `id` and `do`.
    #[must_use]
    pub const fn needs(self) -> &'static [&'static str] {
        match self {
            Verb::Status | Verb::Evidence => &[],
            Verb::Resend => &["from_n"],
            Verb::Acknowledge | Verb::Reset => &["occurrence", "by"],
            Verb::Shelve => &["watch", "until", "by"],
            Verb::Unshelve => &["watch", "by"],
            Verb::AcceptDefect => &["occurrence", "until", "by"],
            Verb::OutOfService | Verb::ReturnToService | Verb::MachineChanged | Verb::SignOff => {
                &["by"]
            }
        }
    }
}

const KEYS: [&str; 12] = [
    "id",
    "do",
    "occurrence",
    "watch",
    "event",
    "point",
    "by",
    "expires",
    "until",
    "from_n",
    "to_n",
    "note",
];

/// Reads a command.
///
/// # Errors
/// The first thing that is wrong, with its byte; see [`Reason`]. A key the verb needs and does not find is missing.
pub fn decode(payload: &[u8]) -> Result<Command, Refusal> {
    let slots = field::read(payload, field::detect(payload)?, &KEYS)?;
    let [
        id,
        verb,
        occurrence,
        watch,
        event,
        point,
        by,
        expires,
        until,
        from_n,
        to_n,
        note,
    ] = &slots;
    let verb = field::text(verb)?
        .map(|(text, field)| Verb::from_text(text).ok_or(field.refuse(Reason::UnknownVerb)))
        .transpose()?;
    let command = Command {
        id: field::required(field::id(id)?, "id")?,
        verb: field::required(verb, "do")?,
        occurrence: field::id(occurrence)?,
        watch: field::id(watch)?,
        event: field::id(event)?,
        point: field::id(point)?,
        by: field::words(by)?,
        expires: field::instant(expires, 1)?,
        until: field::instant(until, 1)?,
        from_n: field::counter(from_n)?,
        to_n: field::counter(to_n)?,
        note: field::words(note)?,
    };
    for key in command.verb.needs() {
        let there = KEYS
            .iter()
            .zip(&slots)
            .any(|(name, slot)| name == key && field::present(slot).is_some());
        field::required(there.then_some(()), key)?;
    }
    Ok(command)
}

#[cfg(test)]
mod tests {
    use alloc::format;

    use super::{Verb, decode};
    use crate::refusal::{Reason, Refusal};

    #[test]
    fn every_verb_reads_with_just_the_keys_it_needs_and_misses_each_of_them() {
        let entry = |key: &&str| match *key {
            "from_n" => format!(r#","{key}":3"#),
            "until" => format!(r#","{key}":"2026-12-02T00:00:00Z""#),
            _ => format!(r#","{key}":"x-1""#),
        };
        for verb in Verb::ALL {
            let needs = verb.needs();
            let write = |left_out: Option<&str>| {
                let keys: alloc::string::String = needs
                    .iter()
                    .filter(|k| Some(**k) != left_out)
                    .map(entry)
                    .collect();
                format!(r#"{{"id":"c-1","do":"{}"{keys}}}"#, verb.text())
            };
            assert_eq!(decode(write(None).as_bytes()).unwrap().verb, verb);
            for key in needs {
                let missing = Refusal {
                    reason: Reason::MissingKey,
                    offset: 0,
                    key: Some(key),
                };
                assert_eq!(
                    decode(write(Some(key)).as_bytes()),
                    Err(missing),
                    "{}",
                    verb.text()
                );
            }
        }
    }

    #[test]
    fn a_verb_we_do_not_have_is_refused_at_its_place() {
        assert_eq!(
            decode(br#"{"id":"c-1","do":"dance"}"#),
            Err(Refusal {
                reason: Reason::UnknownVerb,
                offset: 17,
                key: Some("do")
            })
        );
    }
}
