//! Packings and their interstices, against closed forms, published structures and disturbed input.

mod frameworks;
mod ideal;
mod made;
mod robust;
