//! Lattice reduction (FLINT: LLL in floating-point arithmetic of growing precision, with proof).

use super::fmpz::{Fmpz, to_integer};
use flint3_sys::{
    fmpz_lll, fmpz_lll_context_init_default, fmpz_lll_struct, fmpz_mat_clear, fmpz_mat_entry, fmpz_mat_init,
    fmpz_mat_struct, fmpz_set,
};
use rug::Integer;

/// An LLL-reduced basis (δ = 0.99, η = 0.51) of the lattice spanned by `rows`, all of one length.
pub fn reduce(rows: &[Vec<Integer>]) -> Vec<Vec<Integer>> {
    let (height, width) = (rows.len(), rows.first().map_or(0, Vec::len));
    assert!(rows.iter().all(|row| row.len() == width), "rows of one length");
    if height == 0 || width == 0 {
        return rows.to_vec();
    }
    let mut matrix = fmpz_mat_struct::default();
    let mut context = fmpz_lll_struct::default();
    // SAFETY: the matrix is initialised with these dimensions, every entry is addressed within them,
    // and it is cleared once; no transformation matrix is asked for.
    unsafe {
        fmpz_mat_init(&mut matrix, height as i64, width as i64);
        for (i, row) in rows.iter().enumerate() {
            for (j, entry) in row.iter().enumerate() {
                let value = Fmpz::from_integer(entry);
                fmpz_set(fmpz_mat_entry(&matrix, i as i64, j as i64), value.as_ptr());
            }
        }
        fmpz_lll_context_init_default(&mut context);
        fmpz_lll(&mut matrix, std::ptr::null_mut(), &context);
        let reduced = (0..height)
            .map(|i| (0..width).map(|j| to_integer(&*fmpz_mat_entry(&matrix, i as i64, j as i64))).collect())
            .collect();
        fmpz_mat_clear(&mut matrix);
        reduced
    }
}

#[cfg(test)]
mod tests {
    use super::{Integer, reduce};

    #[test]
    fn a_relation_is_the_shortest_vector() {
        // 3·1000003 − 5·600001 = 4 has no exact relation; 1000003·2 − 2000006 = 0 has.
        let rows: Vec<Vec<Integer>> = [[1, 0, 0, 1_000_003_000], [0, 1, 0, 2_000_006_000], [0, 0, 1, 1_414_213_562]]
            .into_iter()
            .map(|row| row.into_iter().map(Integer::from).collect())
            .collect();
        let first = &reduce(&rows)[0];
        assert_eq!(first[3], 0);
        assert_eq!(first[2], 0);
        assert_eq!(Integer::from(&first[0] + &first[1] * Integer::from(2)), 0);
        assert_ne!(first[0], 0);
    }
}
