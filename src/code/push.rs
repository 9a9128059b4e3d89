//! Operators on a bulk leg pushed to a boundary region.
//!
//! An operator A on a bulk leg is pushed to R when O on R alone satisfies O·V = V·A for the
//! map V from bulk to boundary.

use super::dense::{self, Budget};
use super::pauli::{Factor, Power, Signed};
use super::{Code, CodeError, Held};
use crate::block::PrimePart;
use crate::linalg;
use crate::network::Region;
use crate::watch::Watch;
use ndarray::Array2;
use num_complex::Complex64;
use serde::Serialize;

/// coefficient · Π X^x Z^z, factors in order of sites; the identity elsewhere.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Product {
    /// The number before it.
    pub coefficient: [f64; 2],
    /// Its factors that are not the identity.
    pub factors: Vec<Factor>,
}

/// A pushed operator as a sum of products of generalised Pauli operators.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Pushed {
    /// The terms; one for a generalised Pauli operator.
    pub terms: Vec<Product>,
    /// Stabilizer generators with which every term's commutation was verified.
    pub verified_against: usize,
}

/// A pushed operator as an array on the region's legs.
#[derive(Debug, Clone, PartialEq)]
pub struct PushedArray {
    /// Rows and columns: the region's legs in order of sites, the first the slowest.
    pub operator: Array2<Complex64>,
    /// |O·V − V·A| / |V·A| in the Frobenius norm.
    pub defect: f64,
}

/// The digits (prime, digit) of a bulk leg in a stabilizer network, in the order in which
/// words name them.
///
/// # Errors
/// [`CodeError::NotStabilizer`].
pub fn digits(code: &Code<'_>, leg: usize) -> Result<Vec<(u32, usize)>, CodeError> {
    if !code.is_stabilizer() {
        return Err(code.not_stabilizer("a product of generalised Pauli operators"));
    }
    let of = |c: &super::Checks| {
        let prime = c.prime();
        (0..c.digits_of_bulk(leg).len()).map(move |d| (prime, d)).collect::<Vec<_>>()
    };
    Ok(code.checks().iter().flat_map(of).collect())
}

/// Pushes Π X^x Z^z on a bulk leg's digits to the region's boundary sites, exactly.
///
/// The state's group is restricted to elements that are trivial outside the region and the
/// leg; one of them with the wanted powers on the leg gives the operator with its phase, made
/// lighter by checks that sit on the region. The result is verified against every generator
/// of the state. O(legs³/64)-like: one elimination with phases.
///
/// # Errors
/// [`CodeError::NotStabilizer`]; [`CodeError::CannotHold`] with what the rest holds.
pub fn pauli(
    code: &Code<'_>,
    region: &Region,
    leg: usize,
    powers: &[Power],
) -> Result<Pushed, CodeError> {
    digits(code, leg)?;
    let mut factors = Vec::new();
    let mut angle = 0.0;
    let mut verified = 0;
    for part in code.states() {
        let wanted: Vec<Power> = powers.iter().copied().filter(|p| p.prime == part.prime).collect();
        let (row, against) = one_prime(code, part, region, leg, &wanted)?;
        verified += against;
        angle += f64::from(row.phase) / f64::from(Signed::turns(part.prime));
        let width = part.width();
        let mut at = 0;
        for (site, &count) in part.digits[..code.boundary()].iter().enumerate() {
            for digit in 0..count as usize {
                let (x, z) = (row.xz[at], row.xz[width + at]);
                if x != 0 || z != 0 {
                    factors.push(Factor { site, prime: part.prime, digit, x, z });
                }
                at += 1;
            }
        }
    }
    factors.sort();
    let term = Product { coefficient: turn(angle), factors };
    Ok(Pushed { terms: vec![term], verified_against: verified })
}

/// exp(2πi·angle), exact at quarter turns.
fn turn(angle: f64) -> [f64; 2] {
    let quarters = (angle * 4.0).rem_euclid(4.0);
    match quarters {
        0.0 => [1.0, 0.0],
        1.0 => [0.0, 1.0],
        2.0 => [-1.0, 0.0],
        3.0 => [0.0, -1.0],
        _ => {
            let (s, c) = (std::f64::consts::TAU * angle).sin_cos();
            [c, s]
        }
    }
}

/// Pushes any D × D operator on a bulk leg: expanded in generalised Pauli operators, each of
/// which is pushed.
///
/// # Errors
/// As [`pauli`]; [`CodeError::OperatorShape`].
pub fn expanded(
    code: &Code<'_>,
    region: &Region,
    leg: usize,
    operator: &Array2<Complex64>,
) -> Result<Pushed, CodeError> {
    let dim = code.network().dim(code.network().bulk()[leg]);
    check_shape(operator, dim)?;
    let digits = digits(code, leg)?;
    let basis: Vec<Vec<(u32, u32)>> = all_powers(&digits);
    let norm = operator.iter().map(|z| z.norm_sqr()).sum::<f64>().sqrt();
    let mut out = Pushed { terms: Vec::new(), verified_against: 0 };
    for exponents in basis {
        let powers: Vec<Power> = digits
            .iter()
            .zip(&exponents)
            .map(|(&(prime, digit), &(x, z))| Power { prime, digit, x, z })
            .collect();
        // Tr(P†A)/D: P is monomial, so one entry a column.
        let mut trace = Complex64::new(0.0, 0.0);
        for column in 0..dim {
            let (row, value) = act(&powers, dim, column);
            trace += value.conj() * operator[(row, column)];
        }
        let c = trace / dim as f64;
        if c.norm() <= 1e-14 * norm {
            continue;
        }
        let mut pushed = pauli(code, region, leg, &powers)?;
        out.verified_against = out.verified_against.max(pushed.verified_against);
        for t in &mut pushed.terms {
            let z = Complex64::new(t.coefficient[0], t.coefficient[1]) * c;
            t.coefficient = [z.re, z.im];
        }
        out.terms.append(&mut pushed.terms);
    }
    Ok(out)
}

fn check_shape(operator: &Array2<Complex64>, dim: usize) -> Result<(), CodeError> {
    if operator.dim() == (dim, dim) {
        return Ok(());
    }
    Err(CodeError::OperatorShape { rows: operator.nrows(), columns: operator.ncols(), dim })
}

fn all_powers(digits: &[(u32, usize)]) -> Vec<Vec<(u32, u32)>> {
    let mut out = vec![Vec::new()];
    for &(p, _) in digits {
        out = out
            .into_iter()
            .flat_map(|v: Vec<(u32, u32)>| {
                (0..p * p).map(move |i| {
                    let mut w = v.clone();
                    w.push((i / p, i % p));
                    w
                })
            })
            .collect();
    }
    out
}

/// Where Π X^x Z^z sends basis vector `index` of a leg of dimension `dim`, and with which
/// factor. Digits lie in the index as [`crate::block::Stabilizer`] says.
pub(super) fn act(powers: &[Power], dim: usize, index: usize) -> (usize, Complex64) {
    let mut primes: Vec<(usize, usize)> = Vec::new();
    for p in powers {
        match primes.last_mut() {
            Some((prime, size)) if *prime == p.prime as usize => *size *= *prime,
            _ => primes.push((p.prime as usize, p.prime as usize)),
        }
    }
    let mut block = dim;
    let (mut rest, mut out) = (index, 0);
    let mut angle = 0.0;
    for &(prime, size) in &primes {
        block /= size;
        let mut value = rest / block;
        rest %= block;
        let (mut place, mut moved) = (1, 0);
        for p in powers.iter().filter(|p| p.prime as usize == prime) {
            let digit = value % prime;
            value /= prime;
            angle += (p.z as usize * digit % prime) as f64 / prime as f64;
            moved += (digit + p.x as usize) % prime * place;
            place *= prime;
        }
        out += moved * block;
    }
    let [re, im] = turn(angle);
    (out, Complex64::new(re, im))
}

/// The element of the state's group that is trivial off the region and the leg and has on
/// the leg what makes it the wanted operator's partner; then only its boundary part counts.
fn one_prime(
    code: &Code<'_>,
    part: &PrimePart,
    region: &Region,
    leg: usize,
    wanted: &[Power],
) -> Result<(Signed, usize), CodeError> {
    let p = part.prime;
    let n = part.width();
    let sites = code.boundary();
    let mut at = 0;
    let mut foreign = Vec::new();
    let mut own = Vec::new();
    for (l, &count) in part.digits.iter().enumerate() {
        for d in at..at + count as usize {
            if l == sites + leg {
                own.push(d);
            } else if l >= sites || !region.flags()[l] {
                foreign.push(d);
            }
        }
        at += count as usize;
    }
    let mut rows: Vec<Signed> = part
        .generators
        .iter()
        .zip(&part.phases)
        .map(|(g, &phase)| Signed { xz: g.clone(), phase })
        .collect();
    // Clear the foreign columns; a pivot row is not trivial there and is given up.
    for c in foreign.iter().flat_map(|&d| [d, n + d]) {
        if let Some(row) = pivot(&mut rows, c, p) {
            drop(row);
        }
    }
    // O·A^T-partner: (X^a Z^b)^T inverted is X^a Z^{−b}.
    let mut target = vec![0u32; 2 * own.len()];
    for w in wanted {
        target[2 * w.digit] = w.x;
        target[2 * w.digit + 1] = (p - w.z) % p;
    }
    let mut sum = Signed { xz: vec![0; 2 * n], phase: 0 };
    for (i, c) in own.iter().flat_map(|&d| [d, n + d]).enumerate() {
        let row = pivot(&mut rows, c, p);
        let missing = (target[i] + p - sum.xz[c]) % p;
        if missing == 0 {
            continue;
        }
        let Some(row) = row else { return Err(cannot_hold(code, region, leg)) };
        // The pivot row has 1 at this column.
        sum.times(&row, missing, p);
    }
    let reached = own
        .iter()
        .enumerate()
        .all(|(i, &d)| sum.xz[d] == target[2 * i] && sum.xz[n + d] == target[2 * i + 1]);
    if !reached {
        return Err(cannot_hold(code, region, leg));
    }
    lighten(&mut sum, &rows, p);
    for g in &part.generators {
        assert_eq!(sum.product(g, p), 0, "a pushed operator must commute with the state's group");
    }
    Ok((sum, part.generators.len()))
}

/// Takes out a row with an entry in this column, scaled to 1 there, and clears the column in
/// all others.
fn pivot(rows: &mut Vec<Signed>, column: usize, p: u32) -> Option<Signed> {
    let at = rows.iter().position(|r| r.xz[column] != 0)?;
    let mut row = rows.swap_remove(at);
    let inverse = super::span::inverse(u64::from(row.xz[column]), u64::from(p)) as u32;
    if inverse != 1 {
        let one = row.clone();
        row = Signed { xz: vec![0; one.xz.len()], phase: 0 };
        row.times(&one, inverse, p);
    }
    for r in rows.iter_mut() {
        let c = r.xz[column];
        if c != 0 {
            r.times(&row, p - c, p);
        }
    }
    Some(row)
}

/// Multiplies with checks on the region while that makes the operator act on fewer digits.
fn lighten(sum: &mut Signed, checks: &[Signed], p: u32) {
    let weight = |s: &Signed| {
        let n = s.xz.len() / 2;
        (0..n).filter(|&d| s.xz[d] != 0 || s.xz[n + d] != 0).count()
    };
    let mut best = weight(sum);
    loop {
        let mut better = None;
        for c in checks {
            let mut trial = sum.clone();
            for _ in 1..p {
                trial.times(c, 1, p);
                let w = weight(&trial);
                if w < best {
                    best = w;
                    better = Some(trial.clone());
                }
            }
        }
        match better {
            Some(b) => *sum = b,
            None => return,
        }
    }
}

fn cannot_hold(code: &Code<'_>, region: &Region, leg: usize) -> CodeError {
    // What hinders: operators of the rest of the boundary that act on the leg.
    let mut against = 0;
    for checks in code.checks() {
        let mut held = Held::new(checks);
        (0..code.boundary()).filter(|&s| !region.flags()[s]).for_each(|s| held.add(s));
        against += held.acting_on(leg);
    }
    CodeError::CannotHold {
        leg: code.bulk_name(leg).to_owned(),
        region: region.show(code.network()),
        against,
    }
}

/// Pushes any operator of a small network: the least-squares O = (V·A)·V⁺ with V read as a
/// matrix from everything else to the region.
///
/// # Errors
/// [`CodeError::TooLarge`], [`CodeError::OperatorShape`]; [`CodeError::Defect`] where the
/// best O misses by more than `tolerance`.
pub fn array(
    code: &Code<'_>,
    region: &Region,
    leg: usize,
    operator: &Array2<Complex64>,
    tolerance: f64,
    budget: &Budget,
    watch: &dyn Watch,
) -> Result<PushedArray, CodeError> {
    let net = code.network();
    let dim = net.dim(net.bulk()[leg]);
    check_shape(operator, dim)?;
    let question = "an operator as an array";
    let all = dense::array(code, question, budget, watch)?;
    let sites: Vec<usize> = (0..code.boundary()).filter(|&s| region.flags()[s]).collect();
    let v = dense::matrix(&all, &sites);
    if v.nrows() as u64 > budget.side {
        return Err(CodeError::TooLarge {
            question,
            need: format!("{} rows on the region", v.nrows()),
            limit: format!("{}", budget.side),
        });
    }
    // V·A: the bulk axis is summed with A's rows.
    let axis = code.boundary() + leg;
    let mut acted = ndarray::ArrayD::<Complex64>::zeros(all.raw_dim());
    for b in 0..dim {
        for c in 0..dim {
            let a = operator[(c, b)];
            if a.norm_sqr() > 0.0 {
                let source = all.index_axis(ndarray::Axis(axis), c).to_owned();
                let mut to = acted.index_axis_mut(ndarray::Axis(axis), b);
                to.zip_mut_with(&source, |t, s| *t += a * s);
            }
        }
    }
    let va = dense::matrix(&acted, &sites);
    let svd = linalg::thin_svd(&v.view())?;
    let rank = linalg::rank(&svd.s, 1e-12);
    // O = VA · W† · s⁻¹ · U†.
    let mut right = svd.vt.slice(ndarray::s![..rank, ..]).t().mapv(|z| z.conj());
    for (mut column, &s) in right.columns_mut().into_iter().zip(&svd.s) {
        column.mapv_inplace(|z| z / s);
    }
    let left = svd.u.slice(ndarray::s![.., ..rank]).t().mapv(|z| z.conj());
    let half = linalg::product(&va.view(), &right.view());
    let o = linalg::product(&half.view(), &left.view());
    let miss = linalg::product(&o.view(), &v.view()) - &va;
    let norm = |m: &Array2<Complex64>| m.iter().map(|z| z.norm_sqr()).sum::<f64>().sqrt();
    let defect = norm(&miss) / norm(&va).max(f64::MIN_POSITIVE);
    if defect > tolerance {
        return Err(CodeError::Defect {
            leg: code.bulk_name(leg).to_owned(),
            region: region.show(net),
            defect,
        });
    }
    Ok(PushedArray { operator: o, defect })
}

/// X or Z of a leg of dimension D: X|j⟩ = |j+1⟩, Z|j⟩ = exp(2πij/D)|j⟩.
pub fn shift_or_clock(dim: usize, shift: bool) -> Array2<Complex64> {
    Array2::from_shape_fn((dim, dim), |(i, j)| {
        if shift {
            Complex64::new(f64::from(u8::from(i == (j + 1) % dim)), 0.0)
        } else if i == j {
            let [re, im] = turn(j as f64 / dim as f64);
            Complex64::new(re, im)
        } else {
            Complex64::new(0.0, 0.0)
        }
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::pauli;
    use crate::network::{Limits, Network, Overrides, from_toml};
    use crate::watch::Silent;
    use ndarray::Dimension;

    fn network(text: &str) -> Network {
        let table: toml::Table = text.parse().unwrap();
        let none = Overrides::default();
        from_toml(&table, std::path::Path::new(""), "push", &Limits::default(), &none).unwrap()
    }

    /// Two encoders in a row, one bond, two bulk legs.
    fn pair(dim: usize, block: &str) -> Network {
        network(&format!(
            r#"
dimension = {dim}
boundary = ["a0", "a1", "a2", "a3", "b0", "b1", "b2", "b3"]
bulk = ["k0", "k1"]
tensor = [
  {{ legs = ["a0", "a1", "x", "a2", "a3", "k0"], block = "{block}" }},
  {{ legs = ["b0", "x", "b1", "b2", "b3", "k1"], block = "{block}" }},
]
"#
        ))
    }

    /// The terms written out on all boundary legs, applied to V and compared with V·A.
    fn miss(code: &Code<'_>, leg: usize, operator: &Array2<Complex64>, pushed: &Pushed) -> f64 {
        let v = dense::array(code, "a test", &Budget::default(), &Silent).unwrap();
        let n = code.boundary();
        let dims: Vec<usize> = v.shape().to_vec();
        let mut difference = ndarray::ArrayD::<Complex64>::zeros(v.raw_dim());
        for (index, &z) in v.indexed_iter() {
            for t in &pushed.terms {
                let mut to: Vec<usize> = index.slice().to_vec();
                let mut value = z * Complex64::new(t.coefficient[0], t.coefficient[1]);
                for site in 0..n {
                    let powers: Vec<Power> = pauli_digits(dims[site])
                        .into_iter()
                        .map(|(prime, digit)| {
                            let f = t
                                .factors
                                .iter()
                                .find(|f| (f.site, f.prime, f.digit) == (site, prime, digit));
                            let (x, z) = f.map_or((0, 0), |f| (f.x, f.z));
                            Power { prime, digit, x, z }
                        })
                        .collect();
                    let (moved, c) = act(&powers, dims[site], to[site]);
                    to[site] = moved;
                    value *= c;
                }
                difference[to.as_slice()] += value;
            }
            // V·A: entry b of the bulk axis collects V[c]·A[c, b].
            let c = index[n + leg];
            for b in 0..dims[n + leg] {
                let mut to: Vec<usize> = index.slice().to_vec();
                to[n + leg] = b;
                difference[to.as_slice()] -= z * operator[(c, b)];
            }
        }
        let norm =
            |a: &ndarray::ArrayD<Complex64>| a.iter().map(|z| z.norm_sqr()).sum::<f64>().sqrt();
        norm(&difference) / norm(&v)
    }

    fn pauli_digits(dim: usize) -> Vec<(u32, usize)> {
        crate::field::factorise(dim as u64)
            .into_iter()
            .flat_map(|(p, m)| (0..m as usize).map(move |d| (p as u32, d)))
            .collect()
    }

    fn as_array(powers: &[Power], dim: usize) -> Array2<Complex64> {
        let mut a = Array2::zeros((dim, dim));
        for column in 0..dim {
            let (row, c) = act(powers, dim, column);
            a[(row, column)] = c;
        }
        a
    }

    #[test]
    fn products_act_as_asked_on_the_full_array() {
        for (dim, words) in [(2, &["X", "Z", "XZ"][..]), (3, &["X", "Z2", "X2Z"][..])] {
            let net = pair(dim, "code-5-1-3");
            let code = Code::prepared(&net, &Silent).unwrap();
            for (leg, region) in [(0, "0..4"), (1, "4..8"), (0, "0..3,5..8")] {
                let region = Region::parse(region, &net).unwrap();
                for word in words {
                    let powers = pauli::parse(word, &digits(&code, leg).unwrap()).unwrap();
                    let pushed = pauli(&code, &region, leg, &powers);
                    let pushed = match pushed {
                        Ok(p) => p,
                        Err(CodeError::CannotHold { .. }) => continue,
                        Err(e) => panic!("{e}"),
                    };
                    let sites = &pushed.terms[0].factors;
                    assert!(sites.iter().all(|f| region.flags()[f.site]));
                    let m = miss(&code, leg, &as_array(&powers, dim), &pushed);
                    assert!(m < 1e-12, "dimension {dim}, {word} on {leg}: {m}");
                }
            }
            // Every region holds both operators of a leg or the rest holds something.
            let held = Region::parse("0..4", &net).unwrap();
            let x = pauli::parse("X", &digits(&code, 0).unwrap()).unwrap();
            assert!(pauli(&code, &held, 0, &x).is_ok(), "four of five legs recover the leg");
            let few = Region::parse("0..2", &net).unwrap();
            assert!(matches!(pauli(&code, &few, 0, &x), Err(CodeError::CannotHold { .. })));
        }
    }

    /// One block of dimension 4 and one of 6: digits of prime powers and products.
    #[test]
    fn composite_legs_and_arbitrary_operators() {
        for dim in [4, 6] {
            let net = network(&format!(
                r#"
dimension = {dim}
boundary = ["a0", "a1", "a2", "a3", "a4"]
bulk = ["k"]
tensor = [{{ legs = ["a0", "a1", "a2", "a3", "a4", "k"], block = "six-leg" }}]
"#
            ));
            let code = Code::prepared(&net, &Silent).unwrap();
            let region = Region::parse("0..3", &net).unwrap();
            let operator = Array2::from_shape_fn((dim, dim), |(i, j)| {
                Complex64::new((i * 3 + j) as f64 % 5.0 - 1.0, (i as f64 - j as f64) / 3.0)
            });
            let sum = expanded(&code, &region, 0, &operator).unwrap();
            assert!(sum.terms.len() > 1);
            let scale = operator.iter().map(|z| z.norm_sqr()).sum::<f64>().sqrt();
            let m = miss(&code, 0, &operator, &sum);
            assert!(m < 1e-11 * scale, "dimension {dim}: {m}");
            let full = array(&code, &region, 0, &operator, 1e-9, &Budget::default(), &Silent);
            assert!(full.unwrap().defect < 1e-11);
        }
    }

    /// A network that is no stabilizer network: six-level four-leg tensor, one leg the bulk.
    #[test]
    fn arrays_for_tensors_without_stabilizers() {
        let net = network(
            r#"
dimension = 6
boundary = ["a0", "a1", "a2"]
bulk = ["k"]
tensor = [{ legs = ["a0", "a1", "a2", "k"], block = "four-leg" }]
"#,
        );
        let code = Code::prepared(&net, &Silent).unwrap();
        assert!(!code.is_stabilizer());
        let two = Region::parse("0..2", &net).unwrap();
        let one = Region::parse("1", &net).unwrap();
        for shift in [true, false] {
            let a = shift_or_clock(6, shift);
            let pushed = array(&code, &two, 0, &a, 1e-9, &Budget::default(), &Silent).unwrap();
            assert!(pushed.defect < 1e-12);
            // On a code space that fills two legs the operator is unitary.
            let dagger = pushed.operator.t().mapv(|z| z.conj());
            let square = linalg::product(&dagger.view(), &pushed.operator.view());
            let off = square
                .indexed_iter()
                .map(|((i, j), z)| (z - if i == j { 1.0 } else { 0.0 }).norm());
            assert!(off.fold(0.0, f64::max) < 1e-11);
            let refused = array(&code, &one, 0, &a, 1e-9, &Budget::default(), &Silent);
            assert!(matches!(refused, Err(CodeError::Defect { .. })));
        }
    }
}
