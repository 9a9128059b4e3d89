//! For how many legs of which dimension perfect tensors exist.

use super::BlockError;

/// What is known about perfect tensors with n legs of dimension D.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Existence {
    /// A construction is built in.
    Built,
    /// Proven impossible, with its source.
    Impossible(String),
    /// Recorded as open, with its source.
    Open(String),
    /// Neither a construction nor an exclusion is built in.
    Unsettled,
}

impl Existence {
    pub(super) fn refusal(self, legs: usize, dimension: usize) -> Option<BlockError> {
        match self {
            Existence::Built => None,
            Existence::Impossible(source_text) => {
                Some(BlockError::NoSuchState { legs, dimension, source_text })
            }
            Existence::Open(source_text) => Some(BlockError::Open { legs, dimension, source_text }),
            Existence::Unsettled => Some(BlockError::NoConstruction { legs, dimension }),
        }
    }
}

/// Why no perfect tensor with `legs` legs of dimension `dimension` can exist, where that is
/// proven, or who records the question as open.
///
/// Impossible: the published single cases; n > 2(D²−1) for even and n > 2D(D+1)−1 for odd n
/// (Phys. Rev. A 69, 052330 (2004); bound from memory, recomputed); a negative shadow
/// coefficient (J. Phys. A 51, 175301 (2018); from memory, recomputed).
pub fn obstruction(legs: usize, dimension: usize) -> Option<Existence> {
    let (n, d) = (legs as u128, dimension as u128);
    if dimension < 2 || legs < 2 {
        return None;
    }
    let impossible = |text: &str| Some(Existence::Impossible(text.to_owned()));
    match (legs, dimension) {
        (4, 2) => return impossible("Phys. Lett. A 273, 213 (2000)"),
        (7, 2) => return impossible("Phys. Rev. Lett. 118, 200502 (2017)"),
        _ => {}
    }
    let most = if n.is_multiple_of(2) { 2 * (d * d - 1) } else { 2 * d * (d + 1) - 1 };
    if n > most {
        return Some(Existence::Impossible(format!(
            "Phys. Rev. A 69, 052330 (2004): at most {most} legs there"
        )));
    }
    if let Some(t) = negative_shadow(legs, dimension) {
        return Some(Existence::Impossible(format!(
            "shadow coefficient {t} would be negative: J. Phys. A 51, 175301 (2018)"
        )));
    }
    let open = [(7, 6), (7, 10), (8, 4), (8, 6), (8, 10), (9, 6), (9, 10), (10, 6), (10, 10)];
    let open_long = [(11, 3), (11, 4), (12, 5)];
    if open.contains(&(legs, dimension)) || open_long.contains(&(legs, dimension)) {
        return Some(Existence::Open("Open Quantum Problem 35, statement of 2026".to_owned()));
    }
    None
}

/// The first t with S_t = Σ_{a,b} (−1)^b C(t,a) C(n−t,b) D^{−min(a+b, n−a−b)} < 0.
///
/// Exact in integers; `None` also where these would overflow 127 bits.
fn negative_shadow(n: usize, d: usize) -> Option<usize> {
    let half = n / 2;
    let mut power = vec![1i128; half + 1];
    for k in 1..=half {
        power[k] = power[k - 1].checked_mul(d as i128)?;
    }
    let mut choose = vec![vec![0i128; n + 1]; n + 1];
    for i in 0..=n {
        choose[i][0] = 1;
        for j in 1..=i {
            choose[i][j] = choose[i - 1][j - 1].checked_add(choose[i - 1].get(j).copied()?)?;
        }
    }
    for t in 0..=n {
        let mut sum = 0i128;
        for a in 0..=t {
            for b in 0..=n - t {
                let k = (a + b).min(n - a - b);
                let term =
                    choose[t][a].checked_mul(choose[n - t][b])?.checked_mul(power[half - k])?;
                sum = sum.checked_add(if b.is_multiple_of(2) { term } else { -term })?;
            }
        }
        if sum < 0 {
            return Some(t);
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The exclusions by shadow inequalities up to the bound on n, recomputed independently
    /// with exact fractions.
    #[test]
    fn shadow_exclusions() {
        let table: [(usize, &[usize]); 4] = [
            (2, &[4, 9, 11]),
            (3, &[8, 12, 13, 14, 16, 17, 19, 21, 23]),
            (4, &[12, 16, 20, 24, 25, 26, 28, 29, 30, 33, 37, 39]),
            (5, &[28, 32, 36, 40, 44, 48]),
        ];
        for (d, expected) in table {
            let most =
                |n: usize| if n.is_multiple_of(2) { 2 * (d * d - 1) } else { 2 * d * (d + 1) - 1 };
            let found: Vec<usize> = (2..=2 * d * (d + 1))
                .filter(|&n| n <= most(n) && negative_shadow(n, d).is_some())
                .collect();
            assert_eq!(found, expected, "dimension {d}");
        }
        assert!((2..=20).all(|n| negative_shadow(n, 6).is_none()));
    }

    /// Qubits: none from seven legs on (Phys. Rev. A 69, 052330 (2004) for eight and more).
    #[test]
    fn no_perfect_qubits_beyond_six_legs() {
        for n in 7..40 {
            assert!(matches!(obstruction(n, 2), Some(Existence::Impossible(_))), "{n} legs");
        }
        for n in [2, 3, 5, 6] {
            assert_eq!(obstruction(n, 2), None, "{n} legs");
        }
        assert!(matches!(obstruction(8, 4), Some(Existence::Open(_))));
        assert!(matches!(obstruction(8, 3), Some(Existence::Impossible(_))));
    }
}
