//! The closed word lists of outbound messages, each word with its stable small code.
//!
//! Codes are never reused and the lists only grow. State names are those of IEC 62682 (from memory).

use schemars::JsonSchema;
use serde::{Deserialize, Serialize};

macro_rules! words {
    ($(#[doc = $doc:literal])+ $list:ident { $($(#[doc = $word_doc:literal])+ $name:ident $code:literal $word:literal,)+ }) => {
        $(#[doc = $doc])+
        #[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize, JsonSchema)]
        pub enum $list { $($(#[doc = $word_doc])+ #[serde(rename = $word)] $name,)+ }

        impl $list {
            /// Every word of the list.
            pub const ALL: &'static [$list] = &[$($list::$name,)+];

            /// The word as it stands in messages.
            #[must_use]
            pub const fn word(self) -> &'static str {
                match self { $($list::$name => $word,)+ }
            }

            /// The stable small integer beside the word.
            #[must_use]
            pub const fn code(self) -> u8 {
                match self { $($list::$name => $code,)+ }
            }
        }

        impl core::fmt::Display for $list {
            fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
                f.write_str(self.word())
            }
        }
    };
}

words! {
    /// How far a value can be believed.
    Quality {
        /// Measured and believable.
        Good 0 "good",
        /// Not to be judged: the signal has a fault.
        Doubtful 1 "doubtful",
        /// The true value is at least this: the signal clipped.
        LowerBound 2 "lower_bound",
        /// True once, too old now.
        Stale 3 "stale",
        /// Never measured, or not measurable.
        Missing 4 "missing",
        /// Usable, but an assumption behind it was not verified.
        NotVerified 5 "not_verified",
    }
}

words! {
    /// How bad it is.
    Severity {
        /// Nothing to do.
        None 0 "none",
        /// Look at it.
        Alert 1 "alert",
        /// Act now.
        Danger 2 "danger",
    }
}

words! {
    /// Where an alarm is in its life.
    State {
        /// Normal.
        Norm 0 "NORM",
        /// Raised, not acknowledged.
        Unack 1 "UNACK",
        /// Raised, acknowledged.
        Acked 2 "ACKED",
        /// Returned to normal, not acknowledged.
        Rtnun 3 "RTNUN",
        /// Shelved.
        Shlvd 4 "SHLVD",
        /// Suppressed by design, as at standstill.
        Dsupr 5 "DSUPR",
        /// Out of service.
        Oosrv 6 "OOSRV",
    }
}

words! {
    /// What an event tells.
    Transition {
        /// A new occurrence.
        Raised 0 "raised",
        /// Alert became danger.
        Worsened 1 "worsened",
        /// Danger became alert.
        Eased 2 "eased",
        /// The condition went; acknowledging is still wanted.
        Returned 3 "returned",
        /// The occurrence ended.
        Cleared 4 "cleared",
        /// Somebody has taken note.
        Acknowledged 5 "acknowledged",
        /// The condition came back within the same occurrence.
        Reraised 6 "reraised",
        /// The occurrence ended because its asset or watch left service.
        Withdrawn 7 "withdrawn",
        /// Judging paused: stopped, starting or doubtful.
        Suspended 8 "suspended",
        /// Judging goes on.
        Resumed 9 "resumed",
        /// Hidden for a time.
        Shelved 10 "shelved",
        /// Shown again.
        Unshelved 11 "unshelved",
        /// Taken out of service.
        OutOfService 12 "out_of_service",
        /// Back in service.
        ReturnedToService 13 "returned_to_service",
        /// Events kept in the history but not published; `from_n` and `to_n` name them.
        Omitted 14 "omitted",
    }
}

words! {
    /// Whether the machine turns.
    RunState {
        /// Not known.
        Unknown 0 "unknown",
        /// At rest.
        Stopped 1 "stopped",
        /// Running up, from rest or to a higher speed.
        Starting 2 "starting",
        /// Running.
        Running 3 "running",
        /// Not sent: `coasting` tells of every fall in speed, to rest or not.
        Stopping 4 "stopping",
        /// Running down, to rest or to a lower speed.
        Coasting 5 "coasting",
    }
}

words! {
    /// State of the gateway itself.
    GatewayState {
        /// Gone, or stopped on purpose.
        Offline 0 "offline",
        /// Watching.
        Online 1 "online",
        /// Up, but nothing comes in.
        Blind 2 "blind",
    }
}

words! {
    /// State of one of the gateway's connections.
    Link {
        /// Not connected.
        Down 0 "down",
        /// Connected.
        Up 1 "up",
        /// Waiting before the next try.
        Waiting 2 "waiting",
        /// Refused by the broker: credentials or access rules.
        Refused 3 "refused",
    }
}

words! {
    /// What an event of the gateway tells.
    GatewayEventKind {
        /// The daemon started.
        Started 0 "started",
        /// Nothing comes in any more.
        IngestLost 1 "ingest_lost",
        /// Something comes in again.
        IngestRestored 2 "ingest_restored",
        /// Messages could not be published.
        PublishLost 3 "publish_lost",
        /// Messages can be published again.
        PublishRestored 4 "publish_restored",
        /// Payloads of one kind are refused, again and again.
        PayloadRefused 5 "payload_refused",
        /// Samples were shed because the box could not keep up.
        SamplesShed 6 "samples_shed",
        /// The wall clock was set.
        ClockStep 7 "clock_step",
        /// Another configuration is in force.
        PlanChanged 8 "plan_changed",
        /// Events kept in the history but not published; `from_n` and `to_n` name them.
        Omitted 9 "omitted",
    }
}

words! {
    /// How a command ended.
    Outcome {
        /// Done.
        Ok 0 "ok",
        /// Not allowed in the present state, or not understood; see `reason`.
        Refused 1 "refused",
        /// The occurrence named has closed.
        Superseded 2 "superseded",
        /// There is no open occurrence.
        NothingOpen 3 "nothing_open",
        /// It came after its own `expires`.
        Expired 4 "expired",
    }
}

/// State and severity of an alarm, with their codes; one cannot be written without the other.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize, JsonSchema)]
pub struct Standing {
    state: State,
    state_code: u8,
    severity: Severity,
    severity_code: u8,
}

impl Standing {
    /// Puts words and codes together.
    #[must_use]
    pub fn new(state: State, severity: Severity) -> Standing {
        Standing {
            state,
            state_code: state.code(),
            severity,
            severity_code: severity.code(),
        }
    }

    /// The state.
    #[must_use]
    pub fn state(&self) -> State {
        self.state
    }

    /// The severity.
    #[must_use]
    pub fn severity(&self) -> Severity {
        self.severity
    }
}

#[cfg(test)]
mod tests {
    use super::{
        GatewayEventKind, GatewayState, Link, Outcome, Quality, RunState, Severity, Standing,
        State, Transition,
    };

    macro_rules! codes_are_places {
        ($($list:ident)+) => { $(
            for (place, word) in $list::ALL.iter().enumerate() {
                assert_eq!(usize::from(word.code()), place, "{}", word.word());
                let json = serde_json::to_string(word).unwrap();
                assert_eq!(json.trim_matches('"'), word.word());
                assert_eq!(serde_json::from_str::<$list>(&json).unwrap(), *word);
            }
        )+ };
    }

    #[test]
    fn codes_count_up_from_zero_and_words_survive_json_in_every_list() {
        codes_are_places!(Quality Severity State Transition RunState GatewayState Link GatewayEventKind Outcome);
    }

    #[test]
    fn the_codes_of_states_and_severities_do_not_move() {
        let danger = Standing::new(State::Unack, Severity::Danger);
        assert_eq!(
            serde_json::to_string(&danger).unwrap(),
            r#"{"state":"UNACK","state_code":1,"severity":"danger","severity_code":2}"#
        );
        assert_eq!(
            [
                State::Norm.code(),
                State::Oosrv.code(),
                Severity::None.code(),
                Severity::Alert.code()
            ],
            [0, 6, 0, 1]
        );
    }
}
