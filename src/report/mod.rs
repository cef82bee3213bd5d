//! What people see: tables for the terminal and values for JSON. Prints nothing itself.

pub mod cells;
pub mod holes;
pub mod hosts;
pub mod radii;
pub mod seats;
pub mod table;
pub mod vetting;
