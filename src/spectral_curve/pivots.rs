//! The 4 × 4 systems M B = rhs of the expansions at large v: M = diag(z_a − k) + A_a A^b at zero
//! coupling, rational, with a simple zero eigenvalue where the exponents of two solutions meet.

use super::frame::Frame;
use crate::algebra::flint::dense::Real;
use rug::Rational;

/// A square rational matrix.
type Matrix = Vec<Vec<Rational>>;

/// How to solve at one k.
pub struct Pivot {
    /// The inverse, or an inverse on the image with one component set to zero.
    pub inverse: [[Real; 4]; 4],
    /// Right and left null vectors where M is singular, scaled so that their product is 1.
    pub kernel: Option<([Real; 4], [Real; 4])>,
}

/// The solutions at k = 0, step, 2·step, … for solution i.
pub fn pivots(frame: &Frame, i: usize, third: &Rational) -> Vec<Pivot> {
    let lower = [Rational::new(), Rational::from(1), third.clone(), Rational::from(1)];
    let upper = [Rational::from(-1), third.clone(), Rational::from(-1), Rational::new()];
    (0..=frame.terms)
        .map(|k| {
            let shift = k as i64 * frame.step;
            let matrix: Matrix = (0..4)
                .map(|a| {
                    (0..4)
                        .map(|b| {
                            let entry = Rational::from(&lower[a] * &upper[b]);
                            if a == b { entry + (frame.exponent(i, a) - shift) } else { entry }
                        })
                        .collect()
                })
                .collect();
            pivot(&matrix, frame.bits)
        })
        .collect()
}

fn pivot(matrix: &Matrix, bits: i64) -> Pivot {
    let convert = |row: &[Rational]| -> [Real; 4] { std::array::from_fn(|j| Real::from_rational(&row[j], bits)) };
    if let Some(inverse) = invert(matrix) {
        return Pivot { inverse: std::array::from_fn(|i| convert(&inverse[i])), kernel: None };
    }
    let transposed: Matrix = (0..4).map(|i| (0..4).map(|j| matrix[j][i].clone()).collect()).collect();
    let (kernel, column) = null_vector(matrix);
    let (left, row) = null_vector(&transposed);
    let minor: Matrix = (0..4)
        .filter(|i| *i != row)
        .map(|i| (0..4).filter(|j| *j != column).map(|j| matrix[i][j].clone()).collect())
        .collect();
    let small = invert(&minor).unwrap_or_else(|| vec![vec![Rational::new(); 3]; 3]);
    let skip = |index: usize, gap: usize| if index > gap { index - 1 } else { index };
    let inverse: [[Real; 4]; 4] = std::array::from_fn(|i| {
        std::array::from_fn(|j| {
            if i == column || j == row {
                Real::from_i64(0)
            } else {
                Real::from_rational(&small[skip(i, column)][skip(j, row)], bits)
            }
        })
    });
    let overlap: Rational = (0..4).map(|j| Rational::from(&kernel[j] * &left[j])).sum();
    let scaled: Vec<Rational> =
        left.iter().map(|x| if overlap.is_zero() { x.clone() } else { Rational::from(x / &overlap) }).collect();
    Pivot { inverse, kernel: Some((convert(&kernel), convert(&scaled))) }
}

/// The inverse, if there is one.
fn invert(matrix: &Matrix) -> Option<Matrix> {
    let n = matrix.len();
    let mut work: Matrix = matrix
        .iter()
        .enumerate()
        .map(|(i, row)| row.iter().cloned().chain((0..n).map(|j| Rational::from(i32::from(i == j)))).collect())
        .collect();
    for column in 0..n {
        let pivot = (column..n).find(|&row| !work[row][column].is_zero())?;
        work.swap(column, pivot);
        eliminate(&mut work, column, column);
    }
    Some(work.into_iter().map(|row| row[n..].to_vec()).collect())
}

/// A null vector of a singular matrix of corank one, with the index of a component equal to 1.
fn null_vector(matrix: &Matrix) -> (Vec<Rational>, usize) {
    let n = matrix.len();
    let mut work = matrix.clone();
    let mut pivots = Vec::new();
    let mut free = 0;
    for column in 0..n {
        match (pivots.len()..n).find(|&row| !work[row][column].is_zero()) {
            Some(row) => {
                let target = pivots.len();
                work.swap(target, row);
                eliminate(&mut work, target, column);
                pivots.push(column);
            }
            None => free = column,
        }
    }
    let mut vector = vec![Rational::new(); n];
    vector[free] = Rational::from(1);
    for (row, &column) in pivots.iter().enumerate() {
        vector[column] = -work[row][free].clone();
    }
    (vector, free)
}

/// Makes work[row][column] = 1 and the rest of the column zero.
fn eliminate(work: &mut Matrix, row: usize, column: usize) {
    let inverse = Rational::from(work[row][column].recip_ref());
    work[row].iter_mut().for_each(|entry| *entry *= &inverse);
    let pivot_row = work[row].clone();
    for (other, target) in work.iter_mut().enumerate() {
        if other != row && !target[column].is_zero() {
            let factor = target[column].clone();
            for (entry, source) in target.iter_mut().zip(&pivot_row) {
                *entry -= Rational::from(&factor * source);
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{Frame, pivots};
    use crate::algebra::flint::dense::Scalar;
    use crate::family::Family;
    use crate::spectral_curve::laurent::leading_coefficients;

    /// M is singular exactly where exponents differ by an integer: det M = Π (M̂_i − M̂_i' − k).
    #[test]
    fn singular_exactly_at_the_resonances() {
        for (length, magnons) in [(4, 2), (5, 2), (7, 3), (8, 4)] {
            let frame = Frame::new(Family { length, magnons }, false, 2, 30);
            let third = leading_coefficients(&frame).0[0].clone();
            for (i, expected) in
                [vec![0, length - 1, length], vec![0, 1, length, length + 1], vec![0], vec![0, 1]].iter().enumerate()
            {
                let found: Vec<usize> = pivots(&frame, i, &third)
                    .iter()
                    .enumerate()
                    .filter(|(_, pivot)| pivot.kernel.is_some())
                    .map(|(k, _)| k)
                    .collect();
                assert_eq!(&found, expected, "L = {length}, M = {magnons}, i = {i}");
            }
            assert!(!pivots(&frame, 0, &third)[1].inverse[1][1].is_zero());
        }
    }
}
