//! A recipe's table: typed fields, each refused in a sentence that names table and value.

use super::Selection;
use crate::network::file::{Problem, check_keys};
use crate::network::source::BlockSource;
use serde_json::{Map, Value};
use std::ops::RangeInclusive;

pub(super) const BLOCKS: &str =
    "a block's name, a table with family and settings, or a table with array";

/// A table and what to call it.
#[derive(Clone, Copy)]
pub(super) struct Fields<'a> {
    map: &'a Map<String, Value>,
    place: &'a str,
}

impl<'a> Fields<'a> {
    /// The table, if it has no key but the known ones.
    pub(super) fn new(
        map: &'a Map<String, Value>,
        known: &[&'static str],
        place: &'a str,
    ) -> Result<Self, Problem> {
        check_keys(map, known, place)?;
        Ok(Self { map, place })
    }
    pub(super) fn get(&self, key: &str) -> Option<&'a Value> {
        self.map.get(key)
    }
    pub(super) fn missing(&self, key: &'static str) -> Problem {
        Problem::MissingKey { key, place: self.place.to_owned() }
    }
    pub(super) fn unknown(&self, key: &'static str, value: &Value, known: &'static str) -> Problem {
        let value = match value {
            Value::String(s) => s.clone(),
            other => other.to_string(),
        };
        Problem::Word { key, place: self.place.to_owned(), value, known }
    }
    fn range(&self, key: &'static str, value: &Value, range: &RangeInclusive<u64>) -> Problem {
        Problem::Range {
            key,
            place: self.place.to_owned(),
            value: value.to_string(),
            least: *range.start(),
            most: *range.end(),
        }
    }
    /// A whole number.
    pub(super) fn whole(
        &self,
        key: &'static str,
        range: RangeInclusive<u64>,
    ) -> Result<Option<u64>, Problem> {
        let Some(value) = self.map.get(key) else { return Ok(None) };
        let number = value.as_u64().filter(|n| range.contains(n));
        number.map(Some).ok_or_else(|| self.range(key, value, &range))
    }
    /// A whole number that must be there.
    pub(super) fn needed(
        &self,
        key: &'static str,
        range: RangeInclusive<u64>,
    ) -> Result<u64, Problem> {
        self.whole(key, range)?.ok_or_else(|| self.missing(key))
    }
    /// A whole number, or a list of them.
    pub(super) fn numbers(
        &self,
        key: &'static str,
        range: RangeInclusive<u64>,
    ) -> Result<Option<Vec<u64>>, Problem> {
        let Some(Value::Array(items)) = self.map.get(key) else {
            return Ok(self.whole(key, range)?.map(|n| vec![n]));
        };
        let numbers = items.iter().map(|v| {
            v.as_u64().filter(|n| range.contains(n)).ok_or_else(|| self.range(key, v, &range))
        });
        numbers.collect::<Result<Vec<_>, _>>().map(Some)
    }
    /// A positive finite number.
    pub(super) fn real(&self, key: &'static str) -> Result<Option<f64>, Problem> {
        let Some(value) = self.map.get(key) else { return Ok(None) };
        let number = value.as_f64().filter(|x| x.is_finite() && *x > 0.0);
        number.map(Some).ok_or_else(|| self.unknown(key, value, "positive numbers"))
    }
    /// A truth value, or else the default.
    pub(super) fn flag(&self, key: &'static str, default: bool) -> Result<bool, Problem> {
        match self.map.get(key) {
            None => Ok(default),
            Some(Value::Bool(b)) => Ok(*b),
            Some(other) => Err(self.unknown(key, other, "true, false")),
        }
    }
    /// Which of the words in `known`, parted by `, `; the first where the key is not there.
    pub(super) fn word(&self, key: &'static str, known: &'static str) -> Result<usize, Problem> {
        let Some(value) = self.map.get(key) else { return Ok(0) };
        let number = value.as_str().and_then(|w| known.split(", ").position(|k| k == w));
        number.ok_or_else(|| self.unknown(key, value, known))
    }
    /// A block.
    pub(super) fn block(&self, key: &'static str) -> Result<Option<BlockSource>, Problem> {
        self.map.get(key).map(|v| self.as_block(key, v)).transpose()
    }
    fn as_block(&self, key: &'static str, value: &Value) -> Result<BlockSource, Problem> {
        BlockSource::from_value(value).ok_or_else(|| self.unknown(key, value, BLOCKS))
    }
    /// A list of blocks.
    pub(super) fn blocks(&self, key: &'static str) -> Result<Vec<BlockSource>, Problem> {
        match self.map.get(key) {
            None => Ok(Vec::new()),
            Some(Value::Array(list)) => list.iter().map(|v| self.as_block(key, v)).collect(),
            Some(other) => Err(self.unknown(key, other, "a list of blocks")),
        }
    }
    /// A list of tables.
    pub(super) fn tables(&self, key: &'static str) -> Result<Vec<&'a Map<String, Value>>, Problem> {
        let wrong = |v: &Value| self.unknown(key, v, "a list of tables");
        match self.map.get(key) {
            None => Ok(Vec::new()),
            Some(Value::Array(list)) => {
                list.iter().map(|v| v.as_object().ok_or_else(|| wrong(v))).collect()
            }
            Some(other) => Err(wrong(other)),
        }
    }
    /// A selection of tiles.
    pub(super) fn selection(&self, key: &'static str) -> Result<Option<Selection>, Problem> {
        let Some(value) = self.map.get(key) else { return Ok(None) };
        let text = value.as_str().map_or_else(|| value.to_string(), str::to_owned);
        match Selection::parse(&text) {
            Some(s) => Ok(Some(s)),
            None => Err(Problem::Selection { key, place: self.place.to_owned(), text }),
        }
    }
}
