//! Packings and their interstices, against closed forms, published structures and disturbed input.

#![allow(clippy::unwrap_used, reason = "a failed test may panic")]

mod command;
mod frameworks;
mod ideal;
mod jobs;
mod made;
mod outside;
mod robust;
