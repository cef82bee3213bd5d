//! The syntax of CIF: verdicts, values, messages, round trips.

#![allow(clippy::unwrap_used, reason = "helpers of tests")]

mod conformance;
mod gallery;
mod hostile;
mod own;
mod round_trip;
