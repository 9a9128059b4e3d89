//! Keys of tables: which are known, and which known one an unknown one resembles.

use super::Problem;
use serde_json::{Map, Value};

/// The known key that takes the fewest insertions, deletions, replacements and swaps of
/// neighbours to reach; the first of those in the list.
pub fn nearest<'a>(key: &str, known: &[&'a str]) -> &'a str {
    let key: Vec<char> = key.chars().take(64).flat_map(char::to_lowercase).collect();
    known
        .iter()
        .copied()
        .min_by_key(|k| {
            let k: Vec<char> = k.chars().collect();
            edits(&key, &k)
        })
        .unwrap_or("")
}

fn edits(a: &[char], b: &[char]) -> usize {
    let mut rows = vec![vec![0; b.len() + 1]; a.len() + 1];
    for (i, row) in rows.iter_mut().enumerate() {
        row[0] = i;
    }
    for (j, x) in rows[0].iter_mut().enumerate() {
        *x = j;
    }
    for i in 1..=a.len() {
        for j in 1..=b.len() {
            let differ = usize::from(a[i - 1] != b[j - 1]);
            let mut best =
                (rows[i - 1][j] + 1).min(rows[i][j - 1] + 1).min(rows[i - 1][j - 1] + differ);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                best = best.min(rows[i - 2][j - 2] + 1);
            }
            rows[i][j] = best;
        }
    }
    rows[a.len()][b.len()]
}

/// Refuses a table that has a key outside `known`.
pub(in crate::network) fn check_keys(
    map: &Map<String, Value>,
    known: &[&'static str],
    place: &str,
) -> Result<(), Problem> {
    match map.keys().find(|k| !known.contains(&k.as_str())) {
        None => Ok(()),
        Some(key) => Err(Problem::UnknownKey {
            key: key.clone(),
            place: place.to_owned(),
            nearest: nearest(key, known),
        }),
    }
}

#[cfg(test)]
mod tests {
    use super::nearest;

    #[test]
    fn slips_of_the_pen_find_their_key() {
        let known = ["name", "dimension", "boundary", "bulk", "summed", "legs", "tensor"];
        for (slip, meant) in [
            ("dimensoin", "dimension"),
            ("Boundary", "boundary"),
            ("leg", "legs"),
            ("tensors", "tensor"),
            ("sumed", "summed"),
            ("blk", "bulk"),
        ] {
            assert_eq!(nearest(slip, &known), meant);
        }
    }
}
