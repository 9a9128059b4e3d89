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
        q if q == 0.0 => [1.0, 0.0],
        q if q == 1.0 => [0.0, 1.0],
        q if q == 2.0 => [-1.0, 0.0],
        q if q == 3.0 => [0.0, -1.0],
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
