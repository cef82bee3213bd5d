//! Files: CIF and XYZ.

pub mod cif;
pub mod interstices;
pub mod xyz;
