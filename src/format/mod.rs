//! Files: CIF and XYZ.

pub mod cif;
