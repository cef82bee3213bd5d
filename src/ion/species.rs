//! An ion: element, formal charge, and the spin state where radii depend on it.

use super::Element;
use serde::{Deserialize, Serialize};
use std::fmt;

/// High or low spin, as Shannon's table separates d⁴ to d⁷ ions.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Spin {
    /// High spin, written `hs`.
    High,
    /// Low spin, written `ls`.
    Low,
}

/// An element with a formal charge.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Ion {
    /// The element.
    pub element: Element,
    /// Oxidation state, in e.
    pub charge: i8,
    /// Spin state, if the user stated one.
    pub spin: Option<Spin>,
}

impl Ion {
    /// An ion with no stated spin.
    pub fn new(element: Element, charge: i8) -> Self {
        Self { element, charge, spin: None }
    }
}

/// CIF type-symbol style, digits before the sign: `Fe3+`, `O2-`, `Na1+`; spin follows in parentheses.
impl fmt::Display for Ion {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let sign = if self.charge < 0 { '-' } else { '+' };
        let text = match (self.charge, self.spin) {
            (0, _) => format!("{}0", self.element.symbol()),
            (q, None) => format!("{}{}{sign}", self.element.symbol(), q.unsigned_abs()),
            (q, Some(Spin::High)) => format!("{}{}{sign}(hs)", self.element.symbol(), q.unsigned_abs()),
            (q, Some(Spin::Low)) => format!("{}{}{sign}(ls)", self.element.symbol(), q.unsigned_abs()),
        };
        f.pad(&text)
    }
}

/// What sits on a site: an element whose charge may be unknown, as in many CIFs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Species {
    /// The element.
    pub element: Element,
    /// Formal charge in e, if known.
    pub charge: Option<i8>,
    /// Spin state, if known.
    pub spin: Option<Spin>,
}

impl Species {
    /// The ion, if the charge is known.
    pub fn ion(&self) -> Option<Ion> {
        self.charge.map(|charge| Ion { element: self.element, charge, spin: self.spin })
    }
}

impl From<Ion> for Species {
    fn from(ion: Ion) -> Self {
        Self { element: ion.element, charge: Some(ion.charge), spin: ion.spin }
    }
}

impl fmt::Display for Species {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.ion() {
            Some(ion) => ion.fmt(f),
            None => f.pad(self.element.symbol()),
        }
    }
}
