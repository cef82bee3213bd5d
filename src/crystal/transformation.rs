//! A change of cell as International Tables A write it: (a′,b′,c′) = (a,b,c) P, for example `2a,2b,2c` or `a-b,a+b,c`.

use nalgebra::Matrix3;
use std::fmt;

/// Largest coefficient accepted in a transformation.
pub const MAX_COEFFICIENT: i32 = 1000;

/// An integer matrix P with det P > 0; column j says the new axis j in terms of the old ones.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Transformation {
    matrix: Matrix3<i32>,
}

/// Why a transformation is refused.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum TransformationError {
    /// Not three parts.
    #[error("cell `{text}` has {found} parts; write three separated by commas, for example `2a,2b,2c` or `a-b,a+b,c`")]
    Parts {
        /// As given.
        text: String,
        /// Number of parts.
        found: usize,
    },
    /// A part that is not a sum of integer multiples of a, b, c.
    #[error(
        "cell `{text}`: cannot read `{part}` at character {column}; each part is a sum of whole multiples of a, b, c, such as `2a` or `a-b`"
    )]
    Part {
        /// As given.
        text: String,
        /// The part.
        part: String,
        /// Character (from 1) in the text where reading stopped.
        column: usize,
    },
    /// det P = 0.
    #[error("cell `{text}` spans no volume (determinant 0); the three new axes must be independent")]
    Singular {
        /// As given.
        text: String,
    },
    /// det P < 0.
    #[error("cell `{text}` is left-handed (determinant {determinant}); swap two axes or change one sign")]
    LeftHanded {
        /// As given.
        text: String,
        /// det P.
        determinant: i64,
    },
}

impl Transformation {
    /// From a matrix whose columns are the new axes; `None` unless 0 < det P and every coefficient is within
    /// ±[`MAX_COEFFICIENT`].
    pub fn from_matrix(matrix: Matrix3<i32>) -> Option<Self> {
        let in_range = matrix.iter().all(|k| k.abs() <= MAX_COEFFICIENT);
        (in_range && determinant(&matrix) > 0).then_some(Self { matrix })
    }

    /// The cell unchanged.
    pub fn identity() -> Self {
        Self { matrix: Matrix3::identity() }
    }

    /// P; columns are the new axes in the old basis.
    pub fn matrix(&self) -> &Matrix3<i32> {
        &self.matrix
    }

    /// det P: how many old cells the new one holds.
    pub fn index(&self) -> usize {
        determinant(&self.matrix).unsigned_abs() as usize
    }

    /// Reads `2a,2b,2c`, `a-b, a+b, c`, `-a+2b,…`; blanks are ignored.
    ///
    /// # Errors
    /// [`TransformationError`] that says which part cannot be read, or that the axes are dependent or left-handed.
    pub fn parse(text: &str) -> Result<Self, TransformationError> {
        let parts: Vec<&str> = text.split(',').collect();
        if parts.len() != 3 {
            return Err(TransformationError::Parts { text: text.into(), found: parts.len() });
        }
        let mut matrix = Matrix3::zeros();
        let mut offset = 0;
        for (axis, part) in parts.iter().enumerate() {
            let column = axis_of(part).map_err(|at| TransformationError::Part {
                text: text.into(),
                part: part.trim().into(),
                column: offset + at + 1,
            })?;
            matrix.set_column(axis, &column.into());
            offset += part.chars().count() + 1;
        }
        match determinant(&matrix) {
            0 => Err(TransformationError::Singular { text: text.into() }),
            d if d < 0 => Err(TransformationError::LeftHanded { text: text.into(), determinant: d }),
            _ => Ok(Self { matrix }),
        }
    }
}

/// One new axis, `2a-b`, as coefficients of a, b, c; the error is the character (from 0) that stops reading.
fn axis_of(part: &str) -> Result<[i32; 3], usize> {
    let mut coefficients = [0_i32; 3];
    let (mut sign, mut number, mut seen_sign, mut terms) = (1, None::<i32>, false, 0);
    let mut last = 0;
    for (at, c) in part.chars().enumerate() {
        last = at;
        match c {
            c if c.is_whitespace() => {}
            '+' | '-' | '−' if number.is_none() && !seen_sign => {
                sign = if c == '+' { 1 } else { -1 };
                seen_sign = true;
            }
            '0'..='9' if terms == 0 || seen_sign => {
                let digit = c as i32 - '0' as i32;
                let value = number.unwrap_or(0) * 10 + digit;
                if value > MAX_COEFFICIENT {
                    return Err(at);
                }
                number = Some(value);
            }
            'a' | 'b' | 'c' if terms == 0 || seen_sign => {
                let axis = (c as u8 - b'a') as usize;
                coefficients[axis] += sign * number.unwrap_or(1);
                if coefficients[axis].abs() > MAX_COEFFICIENT {
                    return Err(at);
                }
                (sign, number, seen_sign) = (1, None, false);
                terms += 1;
            }
            _ => return Err(at),
        }
    }
    if terms == 0 || seen_sign || number.is_some() { Err(last) } else { Ok(coefficients) }
}

/// Determinant without overflow for coefficients up to [`MAX_COEFFICIENT`].
fn determinant(m: &Matrix3<i32>) -> i64 {
    let k = m.map(i64::from);
    k[(0, 0)] * (k[(1, 1)] * k[(2, 2)] - k[(1, 2)] * k[(2, 1)])
        - k[(0, 1)] * (k[(1, 0)] * k[(2, 2)] - k[(1, 2)] * k[(2, 0)])
        + k[(0, 2)] * (k[(1, 0)] * k[(2, 1)] - k[(1, 1)] * k[(2, 0)])
}

impl fmt::Display for Transformation {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for axis in 0..3 {
            if axis > 0 {
                f.write_str(",")?;
            }
            write_terms(f, [0, 1, 2].map(|row| self.matrix[(row, axis)]), ["a", "b", "c"])?;
        }
        Ok(())
    }
}

/// Writes `2a-b`; whether there was anything to write.
pub(super) fn write_terms(
    f: &mut fmt::Formatter<'_>,
    coefficients: [i32; 3],
    names: [&str; 3],
) -> Result<bool, fmt::Error> {
    let mut any = false;
    for (k, name) in coefficients.into_iter().zip(names) {
        let sign = match k {
            k if k < 0 => "-",
            _ if any => "+",
            _ => "",
        };
        match k.abs() {
            0 => continue,
            1 => write!(f, "{sign}{name}")?,
            n => write!(f, "{sign}{n}{name}")?,
        }
        any = true;
    }
    Ok(any)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reads_what_it_writes() {
        for text in ["2a,2b,2c", "a-b,a+b,c", "-a+b+c,a-b+c,a+b-c", "a,b,c"] {
            assert_eq!(Transformation::parse(text).unwrap().to_string(), text);
        }
        let p = Transformation::parse(" a - b , a + b , 2c ").unwrap();
        assert_eq!(p.matrix(), &Matrix3::new(1, 1, 0, -1, 1, 0, 0, 0, 2));
        assert_eq!(p.index(), 4);
    }

    #[test]
    fn refuses_what_is_no_cell() {
        use TransformationError as E;
        assert!(matches!(Transformation::parse("2a,2b"), Err(E::Parts { found: 2, .. })));
        assert!(matches!(Transformation::parse("a,b,a"), Err(E::Singular { .. })));
        assert!(matches!(Transformation::parse("b,a,c"), Err(E::LeftHanded { determinant: -1, .. })));
        for (bad, at) in [("1.5a,b,c", 2), ("2a,x,c", 4), ("2a,2,c", 4), ("a,,c", 3), ("a b,b,c", 3), ("9999a,b,c", 4)]
        {
            match Transformation::parse(bad) {
                Err(E::Part { column, .. }) => assert_eq!(column, at, "{bad}"),
                other => panic!("{bad}: {other:?}"),
            }
        }
    }
}
