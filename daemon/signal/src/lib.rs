//! Placeholder.
#![no_std]
