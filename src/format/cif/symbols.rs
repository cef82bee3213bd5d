//! Space-group symbols as files write them, resolved through moyo's tables.

use crate::crystal::symmetry::{Operation, SpaceGroup};
use moyo::data::{HallSymbol, Setting, hall_symbol_entry};
use nalgebra::{Matrix3, Vector3};

/// Operations of a Hall symbol, `-F 4vw 2vw 3`; of the 530 tabulated settings first, else worked out.
pub fn from_hall(text: &str) -> Option<Vec<Operation>> {
    let plain: String = text.trim().replace('_', " ").split_whitespace().collect::<Vec<_>>().join(" ");
    let tabulated =
        (1..=530).find(|n| hall_symbol_entry(*n).is_some_and(|e| e.hall_symbol.eq_ignore_ascii_case(&plain)));
    if let Some(number) = tabulated {
        return SpaceGroup::from_hall_number(number).map(|g| g.operations);
    }
    // The library panics on symbols without a lattice letter or with characters beyond ASCII.
    let body = plain.trim_start_matches('-').trim_start();
    if !plain.is_ascii() || !body.starts_with(['P', 'A', 'B', 'C', 'I', 'R', 'F', 'H', 'S', 'T']) {
        return None;
    }
    let symbol = std::panic::catch_unwind(|| HallSymbol::new(&plain)).ok().flatten()?;
    let (centred, centring) = (symbol.traverse(), symbol.centering.lattice_points());
    let all = centring.iter().flat_map(|t| {
        centred.iter().map(move |op| Operation::from(&moyo::base::Operation::new(op.rotation, op.translation + t)))
    });
    Some(all.collect())
}

/// The setting of a Hermann–Mauguin symbol: blanks, underscores and case of the lattice letter do not matter, an origin
/// or axes may follow after a colon. The second value says what was assumed where the symbol alone does not decide.
pub fn from_hermann_mauguin(text: &str) -> Option<(SpaceGroup, Option<String>)> {
    let squeeze = |s: &str| s.chars().filter(|c| !c.is_whitespace() && *c != '_').collect::<String>();
    let (symbol, extension) = match text.split_once(':') {
        Some((symbol, extension)) => (squeeze(symbol), extension.trim().to_ascii_uppercase()),
        None => (squeeze(text), String::new()),
    };
    // Cubic m-3m groups were written without the bar: Fm3m, Fd3m, Ia3d.
    let barred = [("m3", "m-3"), ("n3", "n-3"), ("d3", "d-3"), ("a3", "a-3")]
        .iter()
        .find_map(|(old, new)| (symbol.get(1..3) == Some(*old)).then(|| symbol.replacen(old, new, 1)));
    let standard = Setting::Standard.hall_numbers();
    for wanted in std::iter::once(symbol.clone()).chain(barred) {
        let matches: Vec<i32> = (1..=530)
            .filter(|n| {
                hall_symbol_entry(*n).is_some_and(|e| {
                    squeeze(e.hm_short).eq_ignore_ascii_case(&wanted)
                        || squeeze(e.hm_full).eq_ignore_ascii_case(&wanted)
                })
            })
            .filter(|n| {
                extension.is_empty()
                    || hall_symbol_entry(*n).is_some_and(|e| e.setting.eq_ignore_ascii_case(&extension))
            })
            .collect();
        let chosen = matches.iter().copied().find(|n| standard.contains(n)).or(matches.first().copied());
        if let Some(number) = chosen {
            let group = SpaceGroup::from_hall_number(number)?;
            let note = (matches.len() > 1 || wanted != symbol)
                .then(|| format!("read as the setting with Hall symbol `{}`", group.hall));
            return Some((group, note));
        }
    }
    None
}

/// The standard setting of a number of International Tables A.
pub fn from_number(number: i32) -> Option<SpaceGroup> {
    let index = usize::try_from(number).ok()?.checked_sub(1)?;
    SpaceGroup::from_hall_number(*Setting::Standard.hall_numbers().get(index)?)
}

/// An operation written as `-x+1/2,y,z+1/4`; decimals near a twenty-fourth are set on it.
pub fn operation(text: &str) -> Option<Operation> {
    let parts: Vec<&str> = text.split(',').collect();
    if parts.len() != 3 {
        return None;
    }
    let (mut rotation, mut translation) = (Matrix3::zeros(), Vector3::zeros());
    for (row, part) in parts.iter().enumerate() {
        let mut rest = part.trim();
        if rest.is_empty() {
            return None;
        }
        while !rest.is_empty() {
            let sign = if rest.starts_with('-') { -1 } else { 1 };
            rest = rest.trim_start_matches(['+', '-']).trim_start();
            let first = rest.chars().next()?.to_ascii_lowercase();
            if let Some(axis) = ['x', 'y', 'z'].iter().position(|c| *c == first) {
                rotation[(row, axis)] += sign;
                rest = rest[1..].trim_start();
            } else {
                let end = rest.find(|c: char| !c.is_ascii_digit() && c != '.' && c != '/').unwrap_or(rest.len());
                let amount = crate::ion::amount::parse(&rest[..end])?;
                let value = crate::ion::amount::to_f64(&amount);
                let exact = (value * 24.0).round() / 24.0;
                translation[row] += f64::from(sign) * if (value - exact).abs() < 2e-3 { exact } else { value };
                rest = rest[end..].trim_start();
            }
            if !rest.is_empty() && !rest.starts_with(['+', '-']) {
                return None;
            }
        }
    }
    let determinant = rotation.map(f64::from).determinant().round();
    let in_cell = translation.map(|t: f64| if t.rem_euclid(1.0) > 1.0 - 1e-9 { 0.0 } else { t.rem_euclid(1.0) });
    (determinant.abs() == 1.0).then_some(Operation { rotation, translation: in_cell })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn operations_are_read_as_written() {
        for (text, want) in [
            ("x,y,z", "x,y,z"),
            ("1/2-X, Y+0.5 ,-z+.333", "-x+1/2,y+1/2,-z+1/3"),
            ("x-y,x,z+5/6", "x-y,x,z+5/6"),
            ("-y,-x,z-1/4", "-y,-x,z+3/4"),
        ] {
            assert_eq!(operation(text).unwrap().to_string(), want);
        }
        for bad in ["", "x,y", "x,y,", "x,x,z", "x y,y,z", "q,y,z", "x,y,z+"] {
            assert!(operation(bad).is_none(), "{bad}");
        }
    }

    /// International Tables A: every tabulated symbol finds its own group.
    #[test]
    fn symbols_old_and_new_are_found() {
        for (text, number) in [
            ("F m -3 m", 225),
            ("Fm3m", 225),
            ("F d -3 m :1", 227),
            ("P 21/c", 14),
            ("P2_1/c", 14),
            ("P 1 21/c 1", 14),
            ("R -3 m :R", 166),
            ("P 42/m n m", 136),
            ("P b n m", 62),
            ("I a -3 d", 230),
        ] {
            assert_eq!(from_hermann_mauguin(text).map(|g| g.0.number), Some(number), "{text}");
        }
        assert!(from_hermann_mauguin("nonsense").is_none());
        for n in 1..=530 {
            let entry = hall_symbol_entry(n).unwrap();
            assert!(from_hall(entry.hall_symbol).is_some());
        }
        for bad in ["", " ", "-", "P 2é", "Q 2"] {
            assert!(from_hall(bad).is_none(), "{bad}");
        }
        assert_eq!(from_number(225).unwrap().hall, "-F 4 2 3");
        assert!(from_number(0).is_none() && from_number(231).is_none());
    }
}
