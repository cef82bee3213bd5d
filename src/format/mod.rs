//! Files: CIF and XYZ.

pub mod cif;
pub mod xyz;
