//! The contract of the wire, from outside: what is refused and where, what survives a round trip, what is sent.
#![expect(
    clippy::unwrap_used,
    clippy::panic,
    reason = "the functions around the tests stop at the first surprise, too"
)]

mod cbor_standard;
mod corpus;
mod evidence;
mod malformed;
mod recordings;
mod round_trip;
mod samples;
mod schemas;
mod sizes;
mod written;
