//! Axioms of every number-like type, and fast paths against slow ones, on random values.

use crate::algebra::factor::factor;
use crate::algebra::gcd::{cofactors, gcd};
use crate::algebra::{
    Fraction, Integer, Monomial, Polynomial, PolynomialRing, PrimeField, Rational, Ring, Symbol,
    SymbolTable, Univariate, UnivariateRing,
};
use crate::budget::Budget;

/// Xorshift with a fixed seed.
struct Random(u64);

impl Random {
    fn word(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0
    }

    fn below(&mut self, bound: u64) -> u64 {
        self.word() % bound
    }

    /// Corner cases often: 0, ±1, the edges of machine words, sums of them, up to 200 bits.
    fn integer(&mut self) -> Integer {
        let value = match self.below(8) {
            0 => Integer::zero(),
            1 => Integer::one(),
            2 => Integer::from(i64::MAX) + Integer::from(self.below(3)),
            3 => Integer::from(i64::MIN) - Integer::from(self.below(3)),
            4 => Integer::from(self.word()) * Integer::from(self.word()),
            5 => Integer::from(self.word() | 1).pow(3) + Integer::from(self.below(9)),
            _ => Integer::from(self.below(40)) - Integer::from(20),
        };
        if self.below(2) == 0 { value } else { -value }
    }

    fn symbols(count: usize) -> Vec<Symbol> {
        let mut table = SymbolTable::new();
        let mut symbols = vec![Symbol::S];
        symbols.extend((1..count).map(|index| table.intern(&format!("x{index}"))));
        symbols
    }

    fn polynomial(&mut self, symbols: &[Symbol], terms: u64, degree: u64) -> Polynomial {
        let count = self.below(terms + 1);
        Polynomial::from_terms((0..count).map(|_| {
            let monomial = symbols.iter().fold(Monomial::one(), |product, &symbol| {
                let exponent = u32::try_from(self.below(degree + 1)).unwrap_or(0);
                product.mul(&Monomial::power(symbol, exponent))
            });
            (monomial, Integer::from(self.below(19)) - Integer::from(9))
        }))
    }
}

/// Axioms of a commutative ring with one.
fn ring_laws<R: Ring>(ring: &R, elements: &[R::Element])
where
    R::Element: PartialEq + std::fmt::Debug,
    R::Error: std::fmt::Debug,
{
    let add = |a: &R::Element, b: &R::Element| ring.add(a, b).expect("no budget");
    let mul = |a: &R::Element, b: &R::Element| ring.mul(a, b).expect("no budget");
    for a in elements {
        assert_eq!(&add(a, &ring.zero()), a);
        assert_eq!(&mul(a, &ring.one()), a);
        assert!(ring.is_zero(&add(a, &ring.neg(a))));
        assert!(ring.is_zero(&mul(a, &ring.zero())));
        for b in elements {
            assert_eq!(add(a, b), add(b, a));
            assert_eq!(mul(a, b), mul(b, a));
            for c in elements {
                assert_eq!(add(&add(a, b), c), add(a, &add(b, c)));
                assert_eq!(mul(&mul(a, b), c), mul(a, &mul(b, c)));
                assert_eq!(mul(a, &add(b, c)), add(&mul(a, b), &mul(a, c)));
            }
        }
    }
}

#[test]
fn prime_fields_and_polynomials_are_rings() {
    let mut random = Random(11);
    for field in PrimeField::primes()
        .take(2)
        .chain([PrimeField::default_prime(), PrimeField::new(3)])
    {
        let elements: Vec<u64> = (0..6).map(|_| random.below(field.prime())).collect();
        ring_laws(&field, &elements);
        let dense: Vec<Univariate> = (0..6)
            .map(|length| {
                Univariate::new((0..length).map(|_| random.below(field.prime())).collect())
            })
            .collect();
        ring_laws(&UnivariateRing { field }, &dense);
    }
    let budget = Budget::unlimited();
    let symbols = Random::symbols(4);
    let elements: Vec<Polynomial> = (0..7).map(|_| random.polynomial(&symbols, 6, 3)).collect();
    ring_laws(&PolynomialRing { budget: &budget }, &elements);
}

#[test]
fn integers_agree_with_the_library() {
    let mut random = Random(23);
    for round in 0..4000 {
        let (a, b) = (random.integer(), random.integer());
        let (x, y) = (a.to_bigint(), b.to_bigint());
        assert_eq!((&a + &b).to_bigint(), &x + &y, "round {round}");
        assert_eq!((&a - &b).to_bigint(), &x - &y, "round {round}");
        assert_eq!((&a * &b).to_bigint(), &x * &y, "round {round}");
        assert_eq!(
            a.gcd(&b).to_bigint(),
            num_integer::Integer::gcd(&x, &y),
            "round {round}: {a} {b}"
        );
        assert_eq!(a.cmp(&b), x.cmp(&y), "round {round}");
        if !b.is_zero() {
            let (quotient, rest) = a.div_rem(&b);
            assert_eq!((quotient.to_bigint(), rest.to_bigint()), (&x / &y, &x % &y));
            assert_eq!((&a * &b).div_exact(&b), Some(a.clone()));
            assert!(quotient.is_canonical() && rest.is_canonical());
        }
        for value in [&a + &b, &a - &b, &a * &b, a.gcd(&b), -&a] {
            assert!(value.is_canonical(), "round {round}: {value}");
        }
    }
}

#[test]
fn rationals_and_fractions_are_fields() {
    let mut random = Random(37);
    let budget = Budget::unlimited();
    for _ in 0..300 {
        let mut make =
            || Rational::new(random.integer(), random.integer()).unwrap_or_else(Rational::zero);
        let (a, b, c) = (make(), make(), make());
        assert_eq!(&a * &(&b + &c), &(&a * &b) + &(&a * &c));
        assert_eq!(&(&a - &b) + &b, a);
        if let Some(inverse) = b.recip() {
            assert_eq!(&(&a * &b) * &inverse, a);
        }
    }
    let symbols = Random::symbols(3);
    for _ in 0..40 {
        let mut make = || {
            let above = random.polynomial(&symbols, 4, 2);
            let below = random.polynomial(&symbols, 4, 2);
            Fraction::new(above, below, &budget)
                .expect("no budget")
                .unwrap_or_else(Fraction::one)
        };
        let (a, b, c) = (make(), make(), make());
        let add = |a: &Fraction, b: &Fraction| a.add(b, &budget).expect("no budget");
        let mul = |a: &Fraction, b: &Fraction| a.mul(b, &budget).expect("no budget");
        assert_eq!(mul(&a, &add(&b, &c)), add(&mul(&a, &b), &mul(&a, &c)));
        assert_eq!(add(&add(&a, &b), &b.neg()), a);
        if let Some(inverse) = b.recip() {
            assert_eq!(mul(&mul(&a, &b), &inverse), a);
        }
        assert!(add(&a, &b).is_canonical() && mul(&a, &b).is_canonical());
    }
}

/// The product, term by term.
fn schoolbook(a: &Polynomial, b: &Polynomial) -> Polynomial {
    Polynomial::from_terms(a.terms().iter().flat_map(|(monomial, x)| {
        b.terms()
            .iter()
            .map(move |(other, y)| (monomial.mul(other), x * y))
    }))
}

#[test]
fn products_agree_with_the_schoolbook_and_divide_back() {
    let mut random = Random(41);
    let budget = Budget::unlimited();
    for round in 0..150 {
        // Up to 70 symbols: too many for one word.
        let symbols = Random::symbols([2, 3, 5, 9, 30, 70][round % 6]);
        let degree = if round % 6 > 2 { 1 } else { 4 };
        let mut make = || random.polynomial(&symbols, 60, degree);
        let (mut a, b) = (make(), make());
        if round % 4 == 0 {
            let large = Integer::from(3).pow(41 + u32::try_from(round).unwrap_or(0));
            a = a.scale(&large);
        }
        let expected = schoolbook(&a, &b);
        assert_eq!(&a * &b, expected, "round {round}");
        assert_eq!(
            a.product(&b, &budget).as_ref(),
            Ok(&expected),
            "round {round}"
        );
        assert!(expected.is_canonical());
        if !b.is_zero() {
            assert_eq!(expected.div_exact(&b), Some(a.clone()), "round {round}");
            let off = &expected + &Polynomial::one();
            let quotient = off.div_exact(&b);
            assert!(quotient.is_none_or(|found| schoolbook(&found, &b) == off));
        }
    }
}

#[test]
fn common_factors_of_products_are_found() {
    let mut random = Random(53);
    let budget = Budget::unlimited();
    for round in 0..60 {
        let symbols = Random::symbols(2 + round % 5);
        let mut make = |terms| random.polynomial(&symbols, terms, 2);
        let (f, g, h) = (make(6), make(6), make(5));
        if f.is_zero() || g.is_zero() || h.is_zero() {
            continue;
        }
        let (a, b) = (&f * &h, &g * &h);
        let (common, left, right) = cofactors(&a, &b, &budget).expect("no budget");
        assert_eq!((&common * &left, &common * &right), (a, b), "round {round}");
        assert!(common.div_exact(&h).is_some(), "round {round}");
        let coprime = gcd(&left, &right, &budget).expect("no budget");
        assert!(coprime.is_one(), "round {round}");
    }
}

#[test]
fn factors_multiply_back_and_do_not_factor_further() {
    let mut random = Random(67);
    let budget = Budget::unlimited();
    for round in 0..30 {
        let symbols = Random::symbols(1 + round % 4);
        let mut make = || random.polynomial(&symbols, 4, 2);
        let (f, g, h) = (make(), make(), make());
        let all = &(&f * &g) * &(&h * &h);
        // Some are beyond reach; then nothing is claimed.
        let Ok(found) = factor(&all, &budget) else {
            continue;
        };
        let unit = Polynomial::constant(found.unit.clone());
        let product = found.factors.iter().fold(unit, |product, (piece, power)| {
            &product * &piece.pow(*power)
        });
        assert_eq!(product, all, "round {round}");
        if all.is_zero() {
            continue;
        }
        for (piece, _) in &found.factors {
            let again = factor(piece, &budget).expect("smaller");
            assert_eq!(again.factors, vec![(piece.clone(), 1)], "round {round}");
        }
        if !h.is_constant() {
            let repeated = found.factors.iter().any(|(_, power)| *power >= 2);
            assert!(repeated, "round {round}");
        }
    }
}

#[test]
fn common_factors_in_many_variables_are_found() {
    let mut random = Random(71);
    for round in 0..12 {
        let symbols = Random::symbols(6 + round % 7);
        let degree = if round % 2 == 0 { 1 } else { 2 };
        let mut make =
            |terms| &random.polynomial(&symbols, terms, degree) + &Polynomial::constant(1);
        let (f, g, h) = (make(12), make(12), make(9));
        let (a, b) = (&f * &h, &g * &h);
        let budget = Budget::default();
        let (common, left, right) = cofactors(&a, &b, &budget).expect("within the budget");
        assert_eq!((&common * &left, &common * &right), (a, b), "round {round}");
        assert!(common.div_exact(&h).is_some(), "round {round}");
    }
}
