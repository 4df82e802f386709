//! Ring laws for every ring, and properties of what is built over them.

use super::graded::{Graded, Grading};
use super::laws;
use super::linear::{self, Solution};
use super::number_field::NumberField;
use super::poly;
use super::prime_field::PrimeField;
use super::quotient::{Quotient, Residues};
use super::rationals::Rationals;
use super::reconstruct::Reconstruction;
use super::ring::Ring;
use proptest::prelude::{Just, ProptestConfig, Strategy, any, prop, proptest};
use rug::{Integer, Rational};

/// Elements of F_p, with the extremes often.
fn residue() -> impl Strategy<Value = u64> {
    proptest::prop_oneof![4 => any::<u64>(), 1 => Just(0), 1 => Just(1), 1 => Just(u64::MAX), 1 => Just(PrimeField::nth(0).modulus() - 1)]
}

fn residues(count: usize) -> impl Strategy<Value = Vec<u64>> {
    prop::collection::vec(residue(), count)
}

fn rational() -> impl Strategy<Value = Rational> {
    proptest::prop_oneof![1 => Just(Rational::new()), 6 => (-999i64..1000, 1i64..60).prop_map(Rational::from)]
}

fn rationals(count: usize) -> impl Strategy<Value = Vec<Rational>> {
    prop::collection::vec(rational(), count)
}

fn small(cases: u32) -> ProptestConfig {
    ProptestConfig { cases, failure_persistence: None, ..ProptestConfig::default() }
}

fn elements(field: &PrimeField, residues: &[u64]) -> Vec<u64> {
    residues.iter().map(|r| field.element(*r)).collect()
}

/// Monic moduli of a degree: a random one, and two that are reducible for sure (with a repeated factor, and a
/// product of linear factors).
fn moduli(field: &PrimeField, degree: usize, random: &[u64]) -> Vec<Vec<u64>> {
    let mut generic = elements(field, &random[..degree]);
    generic.push(field.one());
    let mut power = vec![field.zero(); degree];
    power.push(field.one());
    let linear = (1..=degree).fold(vec![field.one()], |product, root| {
        poly::mul(field, &product, &[field.integer(-(root as i64)), field.one()])
    });
    vec![generic, power, linear]
}

fn check_quotient(degree: usize, random: &[u64]) {
    for index in [0, 5] {
        let field = PrimeField::nth(index);
        for modulus in moduli(&field, degree, random) {
            let ring = Quotient::new(field, modulus);
            let element =
                |k: usize| -> Residues { ring.element(&elements(&field, &random[k * degree..(k + 1) * degree])) };
            laws::check(&ring, &element(1), &element(2), &element(3));
            laws::check(&ring, &element(2), &ring.zero(), &element(1));
            assert_eq!(ring.element(&ring.coefficients(&element(1))), element(1));
        }
    }
}

proptest! {
    #![proptest_config(small(64))]

    #[test]
    fn prime_fields(a in residue(), b in residue(), c in residue(), index in 0usize..20) {
        let field = PrimeField::nth(index);
        let x: Vec<u64> = elements(&field, &[a, b, c]);
        laws::check(&field, &x[0], &x[1], &x[2]);
        assert_eq!(field.residue(x[0]), a % field.modulus());
        assert_eq!(field.inverse(&x[0]).is_some(), x[0] != 0);
        let large = Integer::from(a) * Integer::from(b) - c;
        assert_eq!(field.image(&large), field.sub(&field.mul(&x[0], &x[1]), &x[2]));
    }

    #[test]
    fn quotient_rings_of_degree_one_and_two(random in residues(8)) {
        check_quotient(1, &random);
        check_quotient(2, &random);
    }

    #[test]
    fn rational_numbers(a in rational(), b in rational(), c in rational()) {
        laws::check(&Rationals, &a, &b, &c);
    }
}

proptest! {
    #![proptest_config(small(12))]

    #[test]
    fn quotient_rings_of_degree_five(random in residues(20)) {
        check_quotient(5, &random);
    }

    #[test]
    fn number_fields(a in rationals(4), b in rationals(4), c in rationals(4)) {
        // x − 5, x² − 2, x³ − 40x² + 464x − 1600 (irreducible: BO), x⁴ + 1 (the eighth cyclotomic polynomial).
        for modulus in [vec![-5, 1], vec![-2, 0, 1], vec![-1600, 464, -40, 1], vec![1, 0, 0, 0, 1]] {
            let field = NumberField::new(modulus.into_iter().map(Rational::from).collect());
            let x = [field.element(&a), field.element(&b), field.element(&c)];
            laws::check(&field, &x[0], &x[1], &x[2]);
            assert_eq!(field.inverse(&x[0]).is_some(), !field.is_zero(&x[0]));
        }
    }

    #[test]
    fn graded_series_over_a_prime_field(random in residues(3 * 60), order in 0usize..9) {
        let field = PrimeField::nth(3);
        for grading in [Grading::new(order), Grading::plain(order)] {
            let ring = Graded::new(&field, &grading);
            let element = |k: usize| elements(&field, &(0..grading.len()).map(|i| random[(k * 60 + i) % 180]).collect::<Vec<_>>());
            laws::check(&ring, &element(0), &element(1), &element(2));
            assert_eq!(ring.inverse(&element(0)).is_some(), element(0)[0] != 0);
        }
    }

    #[test]
    fn graded_series_over_the_rationals(random in rationals(45)) {
        for grading in [Grading::new(4), Grading::plain(3)] {
            let ring = Graded::new(&Rationals, &grading);
            let element = |k: usize| (0..grading.len()).map(|i| random[(k * 15 + i) % 45].clone()).collect::<Vec<_>>();
            laws::check(&ring, &element(0), &element(1), &element(2));
        }
    }
}

proptest! {
    #![proptest_config(small(3))]

    #[test]
    fn quotient_rings_of_degree_forty(random in residues(160)) {
        check_quotient(40, &random);
    }

    #[test]
    fn graded_series_over_a_quotient_ring(random in residues(120)) {
        let field = PrimeField::nth(1);
        for modulus in moduli(&field, 3, &random) {
            let base = Quotient::new(field, modulus);
            let grading = Grading::new(5);
            let ring = Graded::new(&base, &grading);
            let element = |k: usize| {
                (0..grading.len()).map(|i| base.element(&elements(&field, &random[(k + i) % 110..][..3]))).collect::<Vec<_>>()
            };
            laws::check(&ring, &element(0), &element(7), &element(31));
        }
    }
}

proptest! {
    #![proptest_config(small(32))]

    /// times_monomial is the product with that monomial, and valuations add up over a domain.
    #[test]
    fn monomials_and_valuations(random in rationals(40), n in 0usize..7, which in 0usize..4) {
        let grading = Grading::new(6);
        let ring = Graded::new(&Rationals, &grading);
        let a: Vec<Rational> = (0..grading.len()).map(|i| random[i % 40].clone()).collect();
        let product: &[u32] = [&[][..], &[3], &[5], &[3, 3]][which];
        let c = Rational::from((-7, 3));
        let mut monomial = ring.zero();
        if let Some(entry) = grading.entry(n, product) {
            monomial[entry] = c.clone();
        }
        let shifted = ring.times_monomial(&a, n, product, &c);
        // hⁿ alone is truncated as a whole where a zeta product without enough powers of h is no entry.
        if grading.entry(n, product).is_some() {
            assert_eq!(shifted, ring.mul(&a, &monomial));
            let expected = (ring.valuation(&a) + n).min(grading.order() + 1);
            assert!(ring.valuation(&shifted) >= expected);
        }
        let plain = Grading::plain(6);
        let series = Graded::new(&Rationals, &plain);
        let (x, y) = (a[..7].to_vec(), a[7..14].to_vec());
        let sum = (series.valuation(&x) + series.valuation(&y)).min(7);
        assert_eq!(series.valuation(&series.mul(&x, &y)), sum);
    }

    #[test]
    fn systems_over_a_prime_field(random in residues(64), n in 1usize..6, rank in 1usize..6) {
        let field = PrimeField::nth(2);
        let random = elements(&field, &random);
        check_systems(&field, &random, n, rank.min(n));
    }

    #[test]
    fn systems_over_the_rationals(random in rationals(64), n in 1usize..5, rank in 1usize..5) {
        check_systems(&Rationals, &random, n, rank.min(n));
    }

    #[test]
    fn polynomials_over_a_prime_field(random in residues(24), c in -20i64..20, d in 1i64..9) {
        let field = PrimeField::nth(0);
        check_polynomials(&field, &elements(&field, &random), c, d);
    }

    #[test]
    fn polynomials_over_the_rationals(random in rationals(24), c in -20i64..20, d in 1i64..9) {
        check_polynomials(&Rationals, &random, c, d);
    }

    /// Rationals survive the way through residues modulo primes; too few primes give no answer rather than a wrong one.
    #[test]
    fn reconstruction(values in rationals(5), big in residues(4)) {
        let mut values = values;
        values.push(Rational::from((Integer::from(big[0]) * big[1], Integer::from(big[2]) * 2u32 + 1u32)));
        let mut numbers = Reconstruction::default();
        let mut rounds = 0;
        loop {
            let field = PrimeField::nth(rounds);
            numbers.push(field, values.iter().map(|v| field.residue(field.scalar(v))).collect());
            rounds += 1;
            if numbers.attempt() == 0 {
                break;
            }
            assert!(rounds < 12);
        }
        assert_eq!(numbers.finish().unwrap(), values);
    }
}

/// A is n × n of the given rank (its later rows are combinations of the first ones).
fn check_systems<R: Ring>(ring: &R, random: &[R::Elem], n: usize, rank: usize) {
    let at = |i: usize| random[i % random.len()].clone();
    let mut rows: Vec<Vec<R::Elem>> = (0..rank).map(|i| (0..n).map(|j| at(i * n + j)).collect()).collect();
    for i in rank..n {
        let row = (0..n)
            .map(|j| (0..rank).fold(ring.zero(), |sum, k| ring.add(&sum, &ring.mul(&at(40 + i + k), &rows[k][j]))))
            .collect();
        rows.push(row);
    }
    let x: Vec<R::Elem> = (0..n).map(|i| at(50 + i)).collect();
    let right = linear::apply(ring, &rows, &x);
    match linear::solve(ring, &rows, &right) {
        Solution::Unique(found) => {
            assert_eq!(found, x);
            assert_eq!(rank, n);
            let inverse = linear::inverse(ring, &rows).unwrap();
            assert_eq!(linear::apply(ring, &inverse, &right), x);
            for (i, row) in inverse.iter().enumerate() {
                let column: Vec<R::Elem> = (0..n).map(|j| if i == j { ring.one() } else { ring.zero() }).collect();
                let transposed: Vec<Vec<R::Elem>> =
                    (0..n).map(|a| (0..n).map(|b| rows[b][a].clone()).collect()).collect();
                assert_eq!(linear::apply(ring, &transposed, row), column, "inverse · A = 1");
            }
        }
        Solution::Family(found, free) => {
            assert_eq!(linear::apply(ring, &rows, &found), right);
            assert!(free >= n - rank && free > 0);
            assert!(linear::inverse(ring, &rows).is_none());
        }
        other => panic!("a solvable system over a field: {other:?}"),
    }
    // One more row that repeats the first with another right side: no solution.
    let mut contradicting = rows.clone();
    contradicting.push(rows[0].clone());
    let mut sides = right.clone();
    sides.push(ring.add(&right[0], &ring.one()));
    assert_eq!(linear::solve(ring, &contradicting, &sides), Solution::None);
}

fn check_polynomials<R: Ring>(ring: &R, random: &[R::Elem], c: i64, d: i64) {
    let a = poly::trim(ring, random[..8].to_vec());
    let b = poly::trim(ring, random[8..13].to_vec());
    let monic: Vec<R::Elem> = random[13..17].iter().cloned().chain(std::iter::once(ring.one())).collect();
    let point = &random[17];
    let constant = ring.ratio(c, d);
    let shifted = poly::shift(ring, &a, &constant);
    assert_eq!(poly::shift(ring, &shifted, &ring.ratio(-c, d)), a, "shifts undo each other");
    let moved = ring.add(point, &ring.constant(&constant));
    assert_eq!(poly::evaluate(ring, &shifted, point), poly::evaluate(ring, &a, &moved), "a(v + c)");
    assert_eq!(
        poly::evaluate_scalar(ring, &a, &constant),
        poly::evaluate(ring, &a, &ring.constant(&constant)),
        "value at a constant"
    );
    let product = poly::trim(ring, poly::mul(ring, &a, &b));
    assert_eq!(
        poly::evaluate(ring, &product, point),
        ring.mul(&poly::evaluate(ring, &a, point), &poly::evaluate(ring, &b, point)),
        "products"
    );
    let leibniz = poly::add(
        ring,
        &poly::mul(ring, &poly::derivative(ring, &a), &b),
        &poly::mul(ring, &a, &poly::derivative(ring, &b)),
    );
    assert_eq!(poly::trim(ring, poly::derivative(ring, &product)), leibniz, "Leibniz's rule");
    let (quotient, rest) = poly::divide(ring, &a, &monic);
    assert!(rest.len() < monic.len());
    assert_eq!(poly::add(ring, &poly::mul(ring, &quotient, &monic), &rest), a, "division");
    assert_eq!(poly::trim(ring, poly::remainder(ring, &a, &monic)), rest, "remainder");
    if !a.is_empty() {
        let by_root = poly::divide_by_root(ring, &a, &constant);
        let linear = [ring.neg(&ring.constant(&constant)), ring.one()];
        let value = poly::evaluate_scalar(ring, &a, &constant);
        assert_eq!(poly::add(ring, &poly::mul(ring, &by_root, &linear), &[value]), a, "division by v − c");
    }
    match poly::series_inverse(ring, &a, 9) {
        Some(inverse) => {
            let mut one = vec![ring.zero(); 9];
            one[0] = ring.one();
            assert_eq!(poly::mul_truncated(ring, &a, &inverse, 9), one, "power series inverse");
        }
        None => assert!(a.is_empty() || ring.is_zero(&a[0])),
    }
    if let Some(inverse) = poly::inverse_modulo(ring, &b, &monic) {
        let product = poly::trim(ring, poly::remainder(ring, &poly::mul(ring, &b, &inverse), &monic));
        assert_eq!(product, vec![ring.one()], "inverse modulo f");
    } else {
        // A common factor: the resultant vanishes, so b · (something of lower degree) = 0 mod f.
        let rows: Vec<Vec<R::Elem>> = (0..4)
            .map(|k| {
                let mut power = vec![ring.zero(); k];
                power.extend(b.iter().cloned());
                let mut row = poly::remainder(ring, &power, &monic);
                row.resize(4, ring.zero());
                row
            })
            .collect();
        assert!(linear::inverse(ring, &rows).is_none());
    }
}

/// Where elimination meets a non-unit that is not zero it says so instead of guessing.
#[test]
fn non_units_leave_a_system_undecided() {
    let field = PrimeField::nth(0);
    let ring = Quotient::new(field, vec![0, 0, field.one()]);
    let x = ring.element(&[0, field.one()]);
    assert_eq!(ring.inverse(&x), None);
    assert_eq!(linear::solve(&ring, &[vec![x.clone()]], &[ring.one()]), Solution::Undecided);
    assert_eq!(linear::solve(&ring, &[vec![ring.zero()]], &[ring.one()]), Solution::None);
    assert_eq!(linear::solve(&ring, &[vec![ring.zero()]], &[ring.zero()]), Solution::Family(vec![ring.zero()], 1));
    assert_eq!(linear::inverse(&ring, &[vec![x]]), None);
}

/// The grading: every pair of entries lands where orders and products add up, and nowhere else.
#[test]
fn products_of_entries() {
    for order in 0..10 {
        let grading = Grading::new(order);
        let mut found = 0;
        let entries: Vec<(usize, Vec<u32>)> =
            (0..=order).flat_map(|n| grading.products(n).iter().map(move |product| (n, product.clone()))).collect();
        assert_eq!(entries.len(), grading.len());
        for (target, (n, product)) in entries.iter().enumerate() {
            assert_eq!(grading.entry(*n, product), Some(target));
            for (a, b) in grading.pairs(target) {
                let ((i, x), (j, y)) = (&entries[*a as usize], &entries[*b as usize]);
                let mut together = [x.as_slice(), y].concat();
                together.sort_unstable();
                assert_eq!((i + j, &together), (*n, product));
                found += 1;
            }
        }
        let all = entries
            .iter()
            .flat_map(|(n, _)| entries.iter().map(move |(m, _)| n + m))
            .filter(|sum| *sum <= order)
            .count();
        assert_eq!(found, all);
    }
}
