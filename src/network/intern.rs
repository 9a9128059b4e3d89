//! Names to numbers, compactly: one text, one table of 32-bit places.

use std::collections::hash_map::DefaultHasher;
use std::hash::Hasher;

const FREE: u32 = u32::MAX;

/// Distinct names, numbered in the order in which they came.
#[derive(Debug, Default)]
pub(super) struct Names {
    text: String,
    ends: Vec<u32>,
    /// Open addressing; a power of two, at most half full.
    table: Vec<u32>,
}

impl Names {
    /// Most bytes that all names together may have.
    pub(super) const MOST_BYTES: usize = u32::MAX as usize - 1;

    fn slot(&self, name: &str) -> usize {
        let mut hasher = DefaultHasher::new();
        hasher.write(name.as_bytes());
        let mask = self.table.len() - 1;
        let mut at = hasher.finish() as usize & mask;
        while self.table[at] != FREE && self.get(self.table[at] as usize) != name {
            at = (at + 1) & mask;
        }
        at
    }
    /// The number of a name, and whether it is new. Nothing where the names no longer fit.
    pub(super) fn number(&mut self, name: &str) -> Option<(u32, bool)> {
        if self.table.len() < 2 * (self.ends.len() + 1) {
            let size = (4 * (self.ends.len() + 1)).next_power_of_two().max(16);
            self.table = vec![FREE; size];
            for n in 0..self.ends.len() {
                let slot = self.slot(self.get(n));
                self.table[slot] = n as u32;
            }
        }
        let slot = self.slot(name);
        if self.table[slot] != FREE {
            return Some((self.table[slot], false));
        }
        if self.text.len() + name.len() > Self::MOST_BYTES {
            return None;
        }
        let n = self.ends.len() as u32;
        self.text.push_str(name);
        self.ends.push(self.text.len() as u32);
        self.table[slot] = n;
        Some((n, true))
    }
    /// How many there are.
    pub(super) fn len(&self) -> usize {
        self.ends.len()
    }
    /// The name of this number.
    pub(super) fn get(&self, number: usize) -> &str {
        let start = if number == 0 { 0 } else { self.ends[number - 1] as usize };
        &self.text[start..self.ends[number] as usize]
    }
}

#[cfg(test)]
mod tests {
    use super::Names;

    #[test]
    fn names_keep_their_numbers_while_the_table_grows() {
        let mut names = Names::default();
        for n in 0..5000u32 {
            assert_eq!(names.number(&format!("x{n}")), Some((n, true)));
        }
        for n in (0..5000u32).rev() {
            assert_eq!(names.number(&format!("x{n}")), Some((n, false)));
            assert_eq!(names.get(n as usize), format!("x{n}"));
        }
        assert_eq!(names.number(""), Some((5000, true)));
        assert_eq!(names.len(), 5001);
    }
}
