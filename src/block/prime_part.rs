//! Stabilizer tensors over one prime: built from codes and graphs, asked by ranks.

use super::PrimePart;
use crate::field::{Field, Matrix};

impl PrimePart {
    /// The state Σ |c⟩ over all words c of the code that `words` span; each word has one
    /// entry a digit, leg by leg.
    pub fn from_code(prime: u32, digits: Vec<u32>, words: &[Vec<u32>]) -> Self {
        let field = prime_field(prime);
        let width = digits.iter().map(|&d| d as usize).sum();
        let mut code = Matrix::from_rows(&field, width, words);
        let rank = code.reduce().len();
        let code = code.select_rows(&(0..rank).collect::<Vec<_>>());
        let none = vec![0; width];
        let mut generators: Vec<Vec<u32>> =
            code.to_rows().into_iter().map(|x| [x, none.clone()].concat()).collect();
        generators
            .extend(code.null_space().to_rows().into_iter().map(|z| [none.clone(), z].concat()));
        let phases = vec![0; generators.len()];
        Self { prime, digits, generators, phases }
    }

    /// The state Σ |c⟩ over the code over GF(q) with these generating words, one leg a place.
    pub fn from_field_code(field: &Field, words: &[Vec<u32>]) -> Self {
        let m = field.degree();
        let legs = words.first().map_or(0, Vec::len);
        let mut rows = Vec::new();
        for word in words {
            for a in 0..m {
                let basis = field.prime().pow(a);
                rows.push(word.iter().flat_map(|&c| field.digits(field.mul(basis, c))).collect());
            }
        }
        Self::from_code(field.prime(), vec![m; legs], &rows)
    }

    /// The graph state Σ χ(Σ_{i<j} A_ij v_i v_j) |v⟩ over GF(q), χ(a) = exp(2πi·Tr(a)/p),
    /// with A the symmetric matrix of weights (its diagonal is not read).
    pub fn from_graph(field: &Field, weights: &[Vec<u32>]) -> Self {
        let (p, m, n) = (field.prime(), field.degree() as usize, weights.len());
        let width = n * m;
        let mut generators = Vec::with_capacity(width);
        for v in 0..n {
            for a in 0..m {
                let mut row = vec![0; 2 * width];
                row[v * m + a] = 1;
                for (u, &w) in weights[v].iter().enumerate() {
                    if u == v || w == 0 {
                        continue;
                    }
                    for b in 0..m {
                        let product = field.mul(p.pow(a as u32), p.pow(b as u32));
                        row[width + u * m + b] = field.trace(field.mul(w, product));
                    }
                }
                generators.push(row);
            }
        }
        let phases = vec![0; width];
        Self { prime: p, digits: vec![m as u32; n], generators, phases }
    }

    /// The generators as a matrix over GF(p), phases left out.
    pub fn matrix(&self) -> Matrix {
        Matrix::from_rows(&prime_field(self.prime), 2 * self.width(), &self.generators)
    }

    /// Columns of `matrix` that belong to the legs in `mask`.
    fn columns(&self, mask: u64) -> Vec<usize> {
        let width = self.width();
        let mut out = Vec::new();
        let mut at = 0;
        for (leg, &d) in self.digits.iter().enumerate() {
            if mask >> leg & 1 == 1 {
                out.extend(at..at + d as usize);
            }
            at += d as usize;
        }
        let z: Vec<usize> = out.iter().map(|c| c + width).collect();
        out.extend(z);
        out
    }

    /// The entropy of the legs in `mask`, in digits (units of log p): the rank of the
    /// generators on their columns less the number of their digits
    /// (arXiv:quant-ph/0406168).
    pub fn entropy(&self, mask: u64) -> usize {
        let columns = self.columns(mask);
        self.matrix().select_columns(&columns).rank() - columns.len() / 2
    }

    /// Whether the legs in `mask` are maximally mixed: then, and only then, the tensor is an
    /// isometry from them to the rest.
    pub fn is_isometry(&self, mask: u64) -> bool {
        let columns = self.columns(mask);
        self.matrix().select_columns(&columns).rank() == columns.len()
    }

    /// The product (x|z;t)(x'|z';t'), phases counted in τ.
    fn multiply(&self, a: &mut (Vec<u32>, u32), b: &(Vec<u32>, u32)) {
        let (p, width) = (self.prime, self.width());
        let crossing: u32 = (0..width).map(|d| a.0[width + d] * b.0[d] % p).sum();
        let (step, modulus) = if p == 2 { (2, 4) } else { (1, p) };
        a.1 = (a.1 + b.1 + step * (crossing % p)) % modulus;
        for (x, y) in a.0.iter_mut().zip(&b.0) {
            *x = (*x + y) % p;
        }
    }

    /// Checks the three invariants; says in words which fails.
    ///
    /// # Errors
    /// The fault, as the end of a sentence that starts with the name of the set.
    pub fn check(&self) -> Result<(), String> {
        let (p, width) = (self.prime, self.width());
        if self.generators.len() != width || self.phases.len() != width {
            return Err(format!("has {} generators for {width} digits", self.generators.len()));
        }
        for (i, a) in self.generators.iter().enumerate() {
            for b in &self.generators[..i] {
                let form: u32 = (0..width)
                    .map(|d| (a[width + d] * b[d] + (p - 1) * (a[d] * b[width + d] % p)) % p)
                    .sum();
                if !form.is_multiple_of(p) {
                    return Err(format!("has a generator {} that does not commute", i + 1));
                }
            }
        }
        let rank = self.matrix().rank();
        if rank < width {
            return Err(format!("has only {rank} independent generators for {width} digits"));
        }
        // Independent commuting generators can only hit a multiple of the identity through
        // their own powers: (τ^t X^x Z^z)^p = τ^{pt} ω^{x·z·p(p−1)/2}.
        if p == 2 {
            for (g, &t) in self.generators.iter().zip(&self.phases) {
                let ys: u32 = (0..width).map(|d| g[d] * g[width + d]).sum();
                if !(t + ys).is_multiple_of(2) {
                    return Err("has a generator whose square is −1".to_owned());
                }
            }
        }
        Ok(())
    }

    /// The non-zero places of the tensor and their phases as exponents of τ: one pair
    /// (Σ value of leg · `weights[leg]`, exponent) each; all have one magnitude.
    ///
    /// The first place has phase 1; O(p^k·width) for p^k places.
    pub(super) fn expand(&self, weights: &[u64]) -> Vec<(u64, u32)> {
        let (p, width) = (self.prime, self.width());
        let (step, modulus) = if p == 2 { (2, 4) } else { (1, p) };
        let mut rows: Vec<(Vec<u32>, u32)> =
            self.generators.iter().cloned().zip(self.phases.iter().copied()).collect();
        // Echelon form of the shift parts.
        let mut rank = 0;
        for col in 0..width {
            let Some(found) = (rank..rows.len()).find(|&r| rows[r].0[col] != 0) else { continue };
            rows.swap(rank, found);
            let (head, tail) = rows.split_at_mut(rank + 1);
            let pivot = &head[rank];
            for row in tail {
                while row.0[col] != 0 {
                    self.multiply(row, pivot);
                }
            }
            rank += 1;
        }
        // What shifts nothing fixes the places: z·j = −t.
        let field = prime_field(p);
        let rules: Vec<Vec<u32>> = rows[rank..].iter().map(|r| r.0[width..].to_vec()).collect();
        let right: Vec<u32> = rows[rank..].iter().map(|r| (p - r.1 / step % p) % p).collect();
        let start = Matrix::from_rows(&field, width, &rules)
            .solve(&right)
            .expect("the generators are independent and fix a state");
        let mut places = vec![(start, 0u32)];
        for (shift, t) in &rows[..rank] {
            let mut layer = places.clone();
            for _ in 1..p {
                for (j, phase) in &mut layer {
                    let crossing: u32 = (0..width).map(|d| shift[width + d] * j[d] % p).sum();
                    *phase = (*phase + t + step * (crossing % p)) % modulus;
                    for (a, b) in j.iter_mut().zip(shift) {
                        *a = (*a + b) % p;
                    }
                }
                places.extend(layer.iter().cloned());
            }
        }
        let mut scale = Vec::with_capacity(width);
        for (leg, &d) in self.digits.iter().enumerate() {
            scale.extend((0..d).map(|i| weights[leg] * u64::from(p.pow(i))));
        }
        places
            .into_iter()
            .map(|(j, t)| (j.iter().zip(&scale).map(|(&v, &w)| u64::from(v) * w).sum(), t))
            .collect()
    }

    /// log_p of the number of non-zero places.
    pub fn support(&self) -> usize {
        let columns: Vec<usize> = (0..self.width()).collect();
        self.matrix().select_columns(&columns).rank()
    }
}

pub(super) fn prime_field(p: u32) -> Field {
    Field::new(u64::from(p)).expect("a prime below 2^16")
}
