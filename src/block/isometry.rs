//! From which sets of legs to the rest a tensor is an isometry.

/// The verified answer to one question, asked of every subset S of a tensor's legs: is the
/// tensor, read as a map from S to the other legs, an isometry up to a positive factor
/// (M†M = c·1 with c > 0, rows being the other legs)?
///
/// A set of legs is a bit mask, leg 0 the lowest bit. What is not known is answered `false`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct IsometryTable {
    legs: usize,
    kind: Kind,
}

#[derive(Debug, Clone, PartialEq, Eq)]
enum Kind {
    /// Every set of at most half of the legs.
    Perfect,
    /// One bit a subset; bit `mask % 64` of word `mask / 64`.
    Bits(Vec<u64>),
    /// Only the empty set.
    Unknown,
}

impl IsometryTable {
    /// Most legs for which one bit a subset is kept.
    pub const MOST_LEGS: usize = 20;

    /// The table of a perfect tensor: all sets of at most half the legs (all legs have one
    /// dimension; the caller has proven it).
    pub fn perfect(legs: usize) -> Self {
        Self { legs, kind: Kind::Perfect }
    }
    /// Nothing is known but that the tensor is not zero.
    pub fn unknown(legs: usize) -> Self {
        Self { legs, kind: Kind::Unknown }
    }
    /// Asks `isometric` about every subset. Above [`Self::MOST_LEGS`] legs nothing is asked
    /// and the table is [`Self::unknown`].
    ///
    /// A subset of an isometric set is isometric, so `isometric` is asked only about sets
    /// all of whose subsets with one leg less have passed. The empty set is always isometric.
    pub fn ask(legs: usize, mut isometric: impl FnMut(u64) -> bool) -> Self {
        if legs > Self::MOST_LEGS {
            return Self::unknown(legs);
        }
        let mut bits = vec![0u64; (1usize << legs).div_ceil(64)];
        bits[0] |= 1;
        let mut masks: Vec<u64> = (1..1u64 << legs).collect();
        masks.sort_by_key(|m| (m.count_ones(), *m));
        for mask in masks {
            let open = (0..legs).filter(|l| mask >> l & 1 == 1).all(|l| {
                let less = mask & !(1 << l);
                bits[(less / 64) as usize] >> (less % 64) & 1 == 1
            });
            if open && isometric(mask) {
                bits[(mask / 64) as usize] |= 1 << (mask % 64);
            }
        }
        Self { legs, kind: Kind::Bits(bits) }
    }
    /// Number of legs.
    pub fn legs(&self) -> usize {
        self.legs
    }
    /// Whether the tensor is an isometry from the legs in `from` to all others.
    ///
    /// Tensors of more than 64 legs have no table; ask only about the empty set.
    pub fn is_isometry(&self, from: u64) -> bool {
        match &self.kind {
            Kind::Perfect => 2 * from.count_ones() as usize <= self.legs,
            Kind::Bits(bits) => bits[(from / 64) as usize] >> (from % 64) & 1 == 1,
            Kind::Unknown => from == 0,
        }
    }
    /// Whether every set of at most half the legs is isometric.
    pub fn is_perfect(&self) -> bool {
        match &self.kind {
            Kind::Perfect => true,
            Kind::Unknown => self.legs < 2,
            Kind::Bits(_) => (0..1u64 << self.legs)
                .filter(|m| 2 * m.count_ones() as usize <= self.legs)
                .all(|m| self.is_isometry(m)),
        }
    }
}
