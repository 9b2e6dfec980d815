//! Valences: which sums of bond orders an atom may have.

use super::Element;

/// Sums of bond orders, hydrogens included, that an atom may have after the
/// spellings of one group were brought to one form; empty where the charge is
/// not supported.
///
/// Neutral atoms follow OpenSMILES, but nitrogen has no five bonds here:
/// pentavalent spellings are rewritten first, what is left is refused.
/// Hypervalent halogens are not supported.
pub(super) const fn allowed(element: Element, charge: i8) -> &'static [u8] {
    match (element, charge) {
        (Element::H | Element::F | Element::Cl | Element::Br | Element::I, 0)
        | (Element::O | Element::S, -1) => &[1],
        (Element::O, 0) | (Element::N | Element::P, -1) => &[2],
        (Element::B | Element::N, 0) | (Element::C, 1 | -1) | (Element::O, 1) => &[3],
        (Element::C | Element::Si, 0) | (Element::B, -1) | (Element::N | Element::P, 1) => &[4],
        (Element::P, 0) | (Element::S, 1) => &[3, 5],
        (Element::S, 0) => &[2, 4, 6],
        _ => &[],
    }
}

/// Valences that decide the hydrogens of an atom written without brackets.
pub(super) const fn implicit(element: Element) -> &'static [u8] {
    match element {
        Element::N => &[3, 5],
        element => allowed(element, 0),
    }
}
