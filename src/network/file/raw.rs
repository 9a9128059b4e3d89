//! A file's content as it stands, read in one pass: flat tables, nothing checked across
//! tensors yet.

use super::keys::nearest;
use super::{Problem, blocks::finite};
use crate::network::intern::Names;
use crate::network::limits::Limits;
use crate::network::source::{BlockSource, NamedBlock};
use num_complex::Complex64;
use serde::de::{self, DeserializeSeed, Deserializer, IgnoredAny, MapAccess, SeqAccess, Visitor};
use serde_json::{Map, Value};
use std::collections::BTreeMap;
use std::fmt;

/// Keys of a network file that are no recipe.
pub(in crate::network) const PLAIN: [&str; 9] =
    ["lierne", "name", "dimension", "boundary", "bulk", "summed", "legs", "layout", "tensor"];
/// Keys of one tensor.
pub(in crate::network) const TENSOR: [&str; 6] = ["name", "legs", "block", "array", "values", "at"];

/// What stood in the file.
#[derive(Debug, Default)]
pub(super) struct Raw {
    pub versioned: bool,
    pub name: Option<String>,
    pub dimension: Option<u64>,
    pub labels: Names,
    /// Boundary, bulk, summed.
    pub lists: [Vec<u32>; 3],
    pub given: [bool; 3],
    pub leg_dims: Vec<(u32, u64)>,
    pub tensor_names: Vec<Option<Box<str>>>,
    pub leg_starts: Vec<u32>,
    pub legs: Vec<u32>,
    pub source_of: Vec<u32>,
    pub sources: Vec<BlockSource>,
    named: BTreeMap<NamedBlock, u32>,
    arrays: BTreeMap<String, u32>,
    last_named: Option<(String, u32)>,
    /// Place and direction of each tensor; empty where none is given.
    pub at: Vec<[f64; 3]>,
    /// Whether directions are given, too.
    pub angled: bool,
    pub layout: Option<Map<String, Value>>,
    pub recipe: Option<(&'static str, Value)>,
}

impl Raw {
    pub(super) fn tensors(&self) -> usize {
        self.source_of.len()
    }
    pub(super) fn legs_of(&self, tensor: usize) -> &[u32] {
        let end = self.leg_starts.get(tensor + 1).map_or(self.legs.len(), |&e| e as usize);
        &self.legs[self.leg_starts[tensor] as usize..end]
    }
    pub(super) fn tensor_name(&self, tensor: usize) -> String {
        match self.tensor_names.get(tensor) {
            Some(Some(name)) => name.to_string(),
            _ => format!("t{tensor}"),
        }
    }
    fn named(&mut self, block: NamedBlock) -> u32 {
        let next = self.sources.len() as u32;
        let number = *self.named.entry(block.clone()).or_insert(next);
        if number == next {
            self.sources.push(BlockSource::Named(block));
        }
        number
    }
    fn array(&mut self, file: String) -> u32 {
        let next = self.sources.len() as u32;
        let number = *self.arrays.entry(file.clone()).or_insert(next);
        if number == next {
            self.sources.push(BlockSource::Array(file));
        }
        number
    }
}

/// Reads a whole file, or the table of a larger file that holds a network.
pub(super) struct Reader<'a> {
    pub raw: &'a mut Raw,
    /// Where a typed problem waits while the format's own error travels up.
    pub slot: &'a mut Option<Problem>,
    pub limits: &'a Limits,
    pub recipes: &'static [&'static str],
}

fn fail<E: de::Error>(slot: &mut Option<Problem>, problem: Problem) -> E {
    let error = E::custom(&problem);
    *slot = Some(problem);
    error
}

fn syntax<E: de::Error>(slot: &mut Option<Problem>, message: String) -> E {
    fail(slot, Problem::Syntax { message })
}

impl<'de> DeserializeSeed<'de> for Reader<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_map(self)
    }
}

impl<'de> Visitor<'de> for Reader<'_> {
    type Value = ();
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a table that describes a network")
    }
    fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<(), A::Error> {
        let Self { raw, slot, limits, recipes } = self;
        let known: Vec<&'static str> = PLAIN.iter().chain(recipes).copied().collect();
        let mut seen = vec![false; known.len()];
        let place = "the file";
        loop {
            let key = KeySeed { known: &known, place, slot };
            let Some(key) = map.next_key_seed(key)? else { break };
            if std::mem::replace(&mut seen[key], true) {
                let key = known[key].to_owned();
                return Err(fail(slot, Problem::KeyTwice { key, place: place.into() }));
            }
            match known[key] {
                "lierne" => {
                    let version: Value = map.next_value()?;
                    if version.as_u64() != Some(1) {
                        return Err(fail(slot, Problem::Version { found: version.to_string() }));
                    }
                    raw.versioned = true;
                }
                "name" => raw.name = Some(map.next_value()?),
                "dimension" => {
                    let value: Value = map.next_value()?;
                    raw.dimension = Some(dimension(&value, "dimension", place, slot)?);
                }
                list @ ("boundary" | "bulk" | "summed") => {
                    let which = match list {
                        "boundary" => 0,
                        "bulk" => 1,
                        _ => 2,
                    };
                    raw.given[which] = true;
                    let to = &mut raw.lists[which];
                    let most = limits.legs;
                    let place = Place::List(list);
                    map.next_value_seed(Labels { names: &mut raw.labels, to, slot, place, most })?;
                }
                "legs" => map.next_value_seed(LegDims { raw, slot, limits })?,
                "layout" => match map.next_value()? {
                    Value::Object(m) => raw.layout = Some(m),
                    _ => return Err(syntax(slot, "layout must be a table".into())),
                },
                "tensor" => map.next_value_seed(Tensors { raw, slot, limits })?,
                recipe => {
                    if let Some((first, _)) = raw.recipe {
                        let (first, second) = (format!("[{first}]"), format!("[{recipe}]"));
                        let problem = Problem::Both { place: place.into(), first, second };
                        return Err(fail(slot, problem));
                    }
                    raw.recipe =
                        Some((recipe, map.next_value_seed(Plain { slot, place: recipe })?));
                }
            }
        }
        Ok(())
    }
}

fn dimension<E: de::Error>(
    value: &Value,
    key: &'static str,
    place: &str,
    slot: &mut Option<Problem>,
) -> Result<u64, E> {
    let most = u64::from(u32::MAX >> 1);
    match value.as_u64().filter(|d| (1..=most).contains(d)) {
        Some(d) => Ok(d),
        None => {
            let value = value.to_string();
            Err(fail(slot, Problem::Range { key, place: place.into(), value, least: 1, most }))
        }
    }
}

/// A key among those known, as its number.
struct KeySeed<'a, 'b> {
    known: &'a [&'static str],
    place: &'b str,
    slot: &'a mut Option<Problem>,
}

impl<'de> DeserializeSeed<'de> for KeySeed<'_, '_> {
    type Value = usize;
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<usize, D::Error> {
        deserializer.deserialize_str(self)
    }
}

impl Visitor<'_> for KeySeed<'_, '_> {
    type Value = usize;
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a key")
    }
    fn visit_str<E: de::Error>(self, key: &str) -> Result<usize, E> {
        match self.known.iter().position(|k| *k == key) {
            Some(n) => Ok(n),
            None => Err(fail(
                self.slot,
                Problem::UnknownKey {
                    key: key.to_owned(),
                    place: self.place.to_owned(),
                    nearest: nearest(key, self.known),
                },
            )),
        }
    }
}

#[derive(Clone, Copy)]
enum Place {
    List(&'static str),
    Tensor(usize),
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::List(list) => f.write_str(list),
            Self::Tensor(t) => write!(f, "tensor {t} (counted from 0)"),
        }
    }
}

/// Whether a region could name this label.
pub(in crate::network) fn label_is_sound(label: &str) -> bool {
    !label.is_empty()
        && label.trim() == label
        && !label.bytes().all(|b| b.is_ascii_digit())
        && !label.contains([',', '\n'])
        && !label.contains("..")
}

/// A list of labels, interned.
struct Labels<'a> {
    names: &'a mut Names,
    to: &'a mut Vec<u32>,
    slot: &'a mut Option<Problem>,
    place: Place,
    most: u64,
}

impl<'de> DeserializeSeed<'de> for Labels<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_seq(self)
    }
}

impl<'de> Visitor<'de> for Labels<'_> {
    type Value = ();
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a list of labels")
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<(), A::Error> {
        let before = self.to.len() as u64;
        loop {
            let (names, place) = (&mut *self.names, self.place);
            let label = OneLabel { names, slot: self.slot, place };
            let Some(n) = seq.next_element_seed(label)? else { return Ok(()) };
            self.to.push(n);
            let count = self.to.len() as u64 - before;
            if count > self.most || self.to.len() >= u32::MAX as usize {
                let what = match self.place {
                    Place::List(_) => "labels in one list",
                    Place::Tensor(_) => "legs on one tensor",
                };
                return Err(fail(self.slot, Problem::TooMany { what, count, limit: self.most }));
            }
        }
    }
}

struct OneLabel<'a> {
    names: &'a mut Names,
    slot: &'a mut Option<Problem>,
    place: Place,
}

impl<'de> DeserializeSeed<'de> for OneLabel<'_> {
    type Value = u32;
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<u32, D::Error> {
        deserializer.deserialize_str(self)
    }
}

impl Visitor<'_> for OneLabel<'_> {
    type Value = u32;
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a label in quotes")
    }
    fn visit_str<E: de::Error>(self, label: &str) -> Result<u32, E> {
        if !label_is_sound(label) {
            let label = label.chars().take(80).collect();
            let place = self.place.to_string();
            return Err(fail(self.slot, Problem::LabelName { label, place }));
        }
        match self.names.number(label) {
            Some((n, _)) => Ok(n),
            None => Err(fail(
                self.slot,
                Problem::TooMany {
                    what: "bytes of labels",
                    count: Names::MOST_BYTES as u64 + 1,
                    limit: Names::MOST_BYTES as u64,
                },
            )),
        }
    }
}

/// The table `[legs]`.
struct LegDims<'a> {
    raw: &'a mut Raw,
    slot: &'a mut Option<Problem>,
    limits: &'a Limits,
}

impl<'de> DeserializeSeed<'de> for LegDims<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_map(self)
    }
}

impl<'de> Visitor<'de> for LegDims<'_> {
    type Value = ();
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a table of labels and dimensions")
    }
    fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<(), A::Error> {
        let place = Place::List("legs");
        loop {
            let names = &mut self.raw.labels;
            let Some(label) = map.next_key_seed(OneLabel { names, slot: self.slot, place })? else {
                return Ok(());
            };
            let value: Value = map.next_value()?;
            let d = dimension(&value, "a dimension", "[legs]", self.slot)?;
            self.raw.leg_dims.push((label, d));
            let count = self.raw.leg_dims.len() as u64;
            if count > self.limits.legs {
                let limit = self.limits.legs;
                return Err(fail(self.slot, Problem::TooMany { what: "legs", count, limit }));
            }
        }
    }
}

/// The list of tensors.
struct Tensors<'a> {
    raw: &'a mut Raw,
    slot: &'a mut Option<Problem>,
    limits: &'a Limits,
}

impl<'de> DeserializeSeed<'de> for Tensors<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_seq(self)
    }
}

impl<'de> Visitor<'de> for Tensors<'_> {
    type Value = ();
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a list of tensors")
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<(), A::Error> {
        loop {
            let one = OneTensor { raw: self.raw, slot: self.slot, limits: self.limits };
            if seq.next_element_seed(one)?.is_none() {
                return Ok(());
            }
            let (tensors, legs) = (self.raw.tensors() as u64, self.raw.legs.len() as u64);
            for (what, count, limit) in [
                ("tensors", tensors, self.limits.tensors),
                ("legs", legs, self.limits.legs.min(u64::from(u32::MAX) - 1)),
            ] {
                if count > limit {
                    return Err(fail(self.slot, Problem::TooMany { what, count, limit }));
                }
            }
        }
    }
}

struct OneTensor<'a> {
    raw: &'a mut Raw,
    slot: &'a mut Option<Problem>,
    limits: &'a Limits,
}

impl<'de> DeserializeSeed<'de> for OneTensor<'_> {
    type Value = ();
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_map(self)
    }
}

impl<'de> Visitor<'de> for OneTensor<'_> {
    type Value = ();
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a tensor, which is a table with legs")
    }
    fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<(), A::Error> {
        let Self { raw, slot, limits } = self;
        let t = raw.tensors();
        let place = format!("tensor {t} (counted from 0)");
        let mut seen = [false; TENSOR.len()];
        let mut source = None;
        let mut at = None;
        let mut name: Option<String> = None;
        raw.leg_starts.push(raw.legs.len() as u32);
        loop {
            let Some(key) = map.next_key_seed(KeySeed { known: &TENSOR, place: &place, slot })?
            else {
                break;
            };
            if std::mem::replace(&mut seen[key], true) {
                let key = TENSOR[key].to_owned();
                return Err(fail(slot, Problem::KeyTwice { key, place }));
            }
            match TENSOR[key] {
                "name" => name = Some(map.next_value()?),
                "legs" => {
                    let (to, most) = (&mut raw.legs, limits.legs_of_a_tensor);
                    let place = Place::Tensor(t);
                    map.next_value_seed(Labels { names: &mut raw.labels, to, slot, place, most })?;
                }
                "block" => {
                    let value = map.next_value_seed(Plain { slot, place: "block" })?;
                    source = Some(match (&value, &raw.last_named) {
                        (Value::String(s), Some((last, number))) if s == last => *number,
                        _ => {
                            let Some(block) = NamedBlock::from_value(&value) else {
                                return Err(syntax(
                                    slot,
                                    format!(
                                        "block of {place} must be a name, or a table with family and settings"
                                    ),
                                ));
                            };
                            let number = raw.named(block);
                            if let Value::String(s) = value {
                                raw.last_named = Some((s, number));
                            }
                            number
                        }
                    });
                }
                "array" => {
                    let file: String = map.next_value()?;
                    source = Some(raw.array(file));
                }
                "values" => {
                    let values = map.next_value_seed(Values { slot })?;
                    if let Some(index) = finite(&values) {
                        let tensor = name.clone().unwrap_or_else(|| format!("t{t}"));
                        return Err(fail(slot, Problem::NotFinite { tensor, index }));
                    }
                    raw.sources.push(BlockSource::Values(values));
                    source = Some(raw.sources.len() as u32 - 1);
                }
                _ => {
                    let place: Vec<f64> = map.next_value()?;
                    at = match place[..] {
                        [x, y] => Some([x, y, 0.0]),
                        [x, y, angle] => {
                            raw.angled = true;
                            Some([x, y, angle])
                        }
                        _ => {
                            let message = "at must be [x, y] or [x, y, angle]";
                            return Err(syntax(slot, message.into()));
                        }
                    };
                }
            }
        }
        if !seen[1] {
            return Err(fail(slot, Problem::MissingKey { key: "legs", place }));
        }
        let made: Vec<&str> = (2..5).filter(|&k| seen[k]).map(|k| TENSOR[k]).collect();
        let (Some(source), 1) = (source, made.len()) else {
            let found = if made.is_empty() { "none".into() } else { made.join(" and ") };
            let tensor = name.unwrap_or_else(|| format!("t{t}"));
            return Err(fail(slot, Problem::Substance { tensor, found }));
        };
        raw.source_of.push(source);
        if name.is_some() && raw.tensor_names.is_empty() {
            raw.tensor_names.resize(t, None);
        }
        if name.is_some() || !raw.tensor_names.is_empty() {
            raw.tensor_names.push(name.map(Into::into));
        }
        if let Some(at) = at {
            if raw.at.len() != t {
                let message = "every tensor has `at`, or none has".to_owned();
                return Err(syntax(slot, message));
            }
            raw.at.push(at);
        }
        Ok(())
    }
}

/// Literal numbers: reals, and complex ones as `[re, im]`.
struct Values<'a> {
    slot: &'a mut Option<Problem>,
}

impl<'de> DeserializeSeed<'de> for Values<'_> {
    type Value = Vec<Complex64>;
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<Self::Value, D::Error> {
        deserializer.deserialize_seq(self)
    }
}

impl<'de> Visitor<'de> for Values<'_> {
    type Value = Vec<Complex64>;
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a list of numbers, complex ones as [re, im]")
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<Self::Value, A::Error> {
        let _ = self.slot;
        let mut values = Vec::new();
        while let Some(OneValue(v)) = seq.next_element()? {
            values.push(v);
        }
        Ok(values)
    }
}

struct OneValue(Complex64);

impl<'de> de::Deserialize<'de> for OneValue {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct Number;
        impl<'de> Visitor<'de> for Number {
            type Value = OneValue;
            fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str("a number or [re, im]")
            }
            fn visit_f64<E>(self, x: f64) -> Result<OneValue, E> {
                Ok(OneValue(Complex64::new(x, 0.0)))
            }
            fn visit_i64<E>(self, x: i64) -> Result<OneValue, E> {
                Ok(OneValue(Complex64::new(x as f64, 0.0)))
            }
            fn visit_u64<E>(self, x: u64) -> Result<OneValue, E> {
                Ok(OneValue(Complex64::new(x as f64, 0.0)))
            }
            fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<OneValue, A::Error> {
                let short = || de::Error::custom("a complex number is [re, im]");
                let re = seq.next_element()?.ok_or_else(short)?;
                let im = seq.next_element()?.ok_or_else(short)?;
                if seq.next_element::<IgnoredAny>()?.is_some() {
                    return Err(short());
                }
                Ok(OneValue(Complex64::new(re, im)))
            }
        }
        deserializer.deserialize_any(Number)
    }
}

/// A small table of plain values, in which no key may stand twice.
struct Plain<'a> {
    slot: &'a mut Option<Problem>,
    place: &'a str,
}

impl<'de> DeserializeSeed<'de> for Plain<'_> {
    type Value = Value;
    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<Value, D::Error> {
        deserializer.deserialize_any(self)
    }
}

impl<'de> Visitor<'de> for Plain<'_> {
    type Value = Value;
    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a plain value")
    }
    fn visit_bool<E>(self, b: bool) -> Result<Value, E> {
        Ok(b.into())
    }
    fn visit_i64<E>(self, n: i64) -> Result<Value, E> {
        Ok(n.into())
    }
    fn visit_u64<E>(self, n: u64) -> Result<Value, E> {
        Ok(n.into())
    }
    fn visit_f64<E>(self, x: f64) -> Result<Value, E> {
        Ok(x.into())
    }
    fn visit_str<E>(self, s: &str) -> Result<Value, E> {
        Ok(s.into())
    }
    fn visit_unit<E>(self) -> Result<Value, E> {
        Ok(Value::Null)
    }
    fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<Value, A::Error> {
        let mut list = Vec::new();
        while let Some(v) = seq.next_element_seed(Plain { slot: self.slot, place: self.place })? {
            list.push(v);
        }
        Ok(Value::Array(list))
    }
    fn visit_map<A: MapAccess<'de>>(self, mut access: A) -> Result<Value, A::Error> {
        let mut map = Map::new();
        while let Some(key) = access.next_key::<String>()? {
            let plain = Plain { slot: self.slot, place: self.place };
            let value = access.next_value_seed(plain)?;
            if map.contains_key(&key) {
                let place = format!("[{}]", self.place);
                return Err(fail(self.slot, Problem::KeyTwice { key, place }));
            }
            map.insert(key, value);
        }
        Ok(Value::Object(map))
    }
}
