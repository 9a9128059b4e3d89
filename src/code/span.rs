//! A growing subspace of GF(p)^n in echelon form, with an undo.

/// A vector over GF(p), packed as its [`Span`] keeps it.
pub(super) type Words = [u64];

/// How vectors of one length over one prime field are packed into words: one bit an entry
/// for p = 2, one word an entry else.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Packing {
    pub(super) prime: u64,
    pub(super) width: usize,
}

impl Packing {
    /// Words a vector takes.
    pub(super) fn stride(self) -> usize {
        if self.prime == 2 { self.width.div_ceil(64) } else { self.width }
    }
    pub(super) fn get(self, v: &Words, i: usize) -> u64 {
        if self.prime == 2 { v[i / 64] >> (i % 64) & 1 } else { v[i] }
    }
    pub(super) fn set(self, v: &mut Words, i: usize, value: u64) {
        if self.prime == 2 {
            v[i / 64] = v[i / 64] & !(1 << (i % 64)) | (value & 1) << (i % 64);
        } else {
            v[i] = value % self.prime;
        }
    }
    /// The first place at or after `from` that does not vanish.
    fn first(self, v: &Words, from: usize) -> Option<usize> {
        if self.prime == 2 {
            let mut word = from / 64;
            let mut bits = v.get(word)? & (!0 << (from % 64));
            loop {
                if bits != 0 {
                    return Some(word * 64 + bits.trailing_zeros() as usize);
                }
                word += 1;
                bits = *v.get(word)?;
            }
        }
        (from..v.len()).find(|&i| v[i] != 0)
    }
    /// v += c·w, from place `from` on.
    pub(super) fn add(self, v: &mut Words, c: u64, w: &Words, from: usize) {
        if self.prime == 2 {
            if c & 1 == 1 {
                for (a, b) in v[from / 64..].iter_mut().zip(&w[from / 64..]) {
                    *a ^= b;
                }
            }
        } else {
            for (a, b) in v[from..].iter_mut().zip(&w[from..]) {
                *a = (*a + c * b) % self.prime;
            }
        }
    }
    /// v ·= c.
    fn scale(self, v: &mut Words, c: u64) {
        if self.prime != 2 {
            for a in v {
                *a = *a * c % self.prime;
            }
        }
    }
    /// Whether all of `range` vanishes.
    pub(super) fn vanishes(self, v: &Words, range: std::ops::Range<usize>) -> bool {
        self.first(v, range.start).is_none_or(|i| i >= range.end)
    }
}

/// 1/a modulo a prime.
pub(super) fn inverse(a: u64, prime: u64) -> u64 {
    let (mut out, mut base, mut e) = (1, a % prime, prime - 2);
    while e > 0 {
        if e & 1 == 1 {
            out = out * base % prime;
        }
        base = base * base % prime;
        e >>= 1;
    }
    out
}

const NONE: u32 = u32::MAX;

/// The span of the vectors pushed so far, one row a dimension. A row leads with a 1 at its
/// pivot, and rows are reduced by the rows before them only, so that the last pushes can be
/// taken back.
///
/// A push costs one row operation for each pivot it meets: O(dimension·width/64) for p = 2.
#[derive(Debug, Clone)]
pub(super) struct Span {
    packing: Packing,
    rows: Vec<u64>,
    pivots: Vec<u32>,
    row_of: Vec<u32>,
    spare: Vec<u64>,
}

impl Span {
    pub(super) fn new(packing: Packing) -> Self {
        Self {
            packing,
            rows: Vec::new(),
            pivots: Vec::new(),
            row_of: vec![NONE; packing.width],
            spare: vec![0; packing.stride()],
        }
    }
    pub(super) fn dimension(&self) -> usize {
        self.pivots.len()
    }
    /// The pivot of a row.
    pub(super) fn pivot(&self, row: usize) -> usize {
        self.pivots[row] as usize
    }
    pub(super) fn row(&self, row: usize) -> &Words {
        let s = self.packing.stride();
        &self.rows[row * s..(row + 1) * s]
    }
    /// Adds a vector; returns the pivot of the row it gave, if it was not in the span.
    pub(super) fn push(&mut self, vector: &Words) -> Option<usize> {
        let mut spare = std::mem::take(&mut self.spare);
        spare.copy_from_slice(vector);
        let pivot = self.reduce(&mut spare);
        if let Some(place) = pivot {
            let lead = self.packing.get(&spare, place);
            if lead != 1 {
                self.packing.scale(&mut spare, inverse(lead, self.packing.prime));
            }
            self.row_of[place] = self.pivots.len() as u32;
            self.pivots.push(place as u32);
            self.rows.extend_from_slice(&spare);
        }
        self.spare = spare;
        pivot
    }
    /// Clears the places of pivots up to the first place without one, which is returned.
    fn reduce(&self, v: &mut Words) -> Option<usize> {
        let p = self.packing;
        let mut at = 0;
        while let Some(place) = p.first(v, at) {
            let row = self.row_of[place];
            if row == NONE {
                return Some(place);
            }
            let c = p.prime - p.get(v, place);
            p.add(v, c, self.row(row as usize), place);
            at = place + 1;
        }
        None
    }
    /// Whether a vector lies in the span; `v` is used up.
    pub(super) fn holds(&self, v: &mut Words) -> bool {
        self.reduce(v).is_none()
    }
    /// Takes back every push that made a row at or after this one.
    pub(super) fn rewind(&mut self, dimension: usize) {
        for &p in &self.pivots[dimension..] {
            self.row_of[p as usize] = NONE;
        }
        self.pivots.truncate(dimension);
        self.rows.truncate(dimension * self.packing.stride());
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::Rng;
    use rand::SeedableRng;
    use rand_chacha::ChaCha8Rng;

    /// Rank by elimination on plain residues.
    fn plain_rank(mut rows: Vec<Vec<u64>>, p: u64) -> usize {
        let mut rank = 0;
        let width = rows.first().map_or(0, Vec::len);
        for c in 0..width {
            let Some(at) = (rank..rows.len()).find(|&r| rows[r][c] != 0) else { continue };
            rows.swap(rank, at);
            let inv = inverse(rows[rank][c], p);
            let lead: Vec<u64> = rows[rank].iter().map(|x| x * inv % p).collect();
            for row in rows.iter_mut().skip(rank + 1) {
                let f = row[c];
                for (x, l) in row.iter_mut().zip(&lead) {
                    *x = (*x + (p - f) * l) % p;
                }
            }
            rank += 1;
        }
        rank
    }

    #[test]
    fn dimension_is_the_rank_and_rewinds() {
        let mut rng = ChaCha8Rng::seed_from_u64(7);
        for p in [2u64, 3, 5, 13] {
            for width in [1usize, 5, 63, 64, 65, 130] {
                let packing = Packing { prime: p, width };
                let mut span = Span::new(packing);
                let mut rows: Vec<Vec<u64>> = Vec::new();
                let mut marks = vec![0];
                for k in 0..40 {
                    let mut v: Vec<u64> = (0..width).map(|_| rng.random_range(0..p)).collect();
                    if k % 3 == 2 {
                        let c = rng.random_range(0..p);
                        v = rows[k - 1]
                            .iter()
                            .zip(&rows[k - 2])
                            .map(|(a, b)| (a + c * b) % p)
                            .collect();
                    }
                    let mut packed = vec![0; packing.stride()];
                    for (i, &x) in v.iter().enumerate() {
                        packing.set(&mut packed, i, x);
                    }
                    span.push(&packed);
                    assert!(span.holds(&mut packed));
                    rows.push(v);
                    assert_eq!(
                        span.dimension(),
                        plain_rank(rows.clone(), p),
                        "p = {p}, n = {width}"
                    );
                    marks.push(span.dimension());
                }
                span.rewind(marks[11]);
                assert_eq!(span.dimension(), plain_rank(rows[..11].to_vec(), p));
            }
        }
    }
}
