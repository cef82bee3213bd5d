//! Seats: which interstices each cation takes, how many of them, and the evidence for and against.
//!
//! Every assignment that the host can hold is weighed and listed, best first. The evidence of a seat (radius ratio,
//! bond strength, coordination usually observed, ligand-field preference) is kept beside the decision; the user's word
//! stands above all of it. Does not say which of the equal interstices is taken: `ordering` does.

mod evidence;
mod member;
mod offer;
mod plan;
mod request;
mod rule2;
mod spheres;

pub use evidence::{Evidence, Fit};
pub use member::{Member, members};
pub use offer::{Offer, Rung, ladder, offers};
pub use plan::{NEAR_TIE, Plan, Seat, Seating, decide};
pub use request::{MemberRequest, SeatRequest};
pub use spheres::{SphereCount, sphere_count};

use crate::ion::Amount;

/// Why no seats could be found.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[non_exhaustive]
pub enum SeatingError {
    /// No anion to pack or no cation to seat.
    #[error("`{composition}` has no {missing}; a packing of anions with cations in its interstices needs both")]
    OneSided {
        /// The composition.
        composition: String,
        /// `cation` or `anion`.
        missing: &'static str,
    },
    /// A packing of cations alone.
    #[error(
        "all spheres of `{host}` are cations; seats between them are not decided here, `interstice holes {host}` shows its interstices; take a packing of anions"
    )]
    CationHost {
        /// The host's name.
        host: String,
    },
    /// More cations are sent into the packing than it has spheres for.
    #[error(
        "`{composition}`: {needed} cations per formula unit are sent to the spheres {sphere} of {host}, which has {available}; send fewer, for example `{element}:{sphere}={available}`"
    )]
    NoSphere {
        /// The composition.
        composition: String,
        /// How many are sent.
        needed: Amount,
        /// Name of the sphere.
        sphere: String,
        /// The host's name.
        host: String,
        /// How many there are.
        available: Amount,
        /// Element of the first of them.
        element: crate::ion::Element,
    },
    /// The packing cannot hold that many cations.
    #[error(
        "`{composition}` asks for {needed} interstices of {kind} per formula unit, but {host} offers {available}; {remedy}"
    )]
    TooFew {
        /// The composition.
        composition: String,
        /// How many are asked for.
        needed: Amount,
        /// Of which kind: `one kind`, `tetrahedral kind`.
        kind: String,
        /// The host's name.
        host: String,
        /// How many there are.
        available: Amount,
        /// What to do.
        remedy: String,
    },
    /// `--seats` names a kind that the host lacks.
    #[error("{host} has no {kind} interstice; it offers {offered}. {elsewhere}")]
    NoSuchKind {
        /// The host's name.
        host: String,
        /// The kind asked for.
        kind: String,
        /// The kinds that the host has.
        offered: String,
        /// Which named hosts have that kind.
        elsewhere: String,
    },
    /// `--seats` cannot be read or does not fit the composition.
    #[error(
        "seats `{text}`: {reason}; write for example `Mg:tetrahedral,Al:octahedral`, with an amount where an ion is split: `Fe(III):tetrahedral=1`"
    )]
    Request {
        /// As given.
        text: String,
        /// What is wrong.
        reason: String,
    },
    /// An ion whose radius is in no table.
    #[error(transparent)]
    Radius(#[from] crate::ion::radius::RadiusError),
    /// More cations than assignments can be listed for.
    #[error(
        "{ions} kinds of cation in {kinds} kinds of interstice give more than {limit} assignments; say with `--seats` where some of them sit"
    )]
    TooMany {
        /// Number of cations.
        ions: usize,
        /// Number of kinds.
        kinds: usize,
        /// Named limit.
        limit: usize,
    },
}
