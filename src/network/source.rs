//! What a tensor of a file is made of.

use num_complex::Complex64;
use serde_json::{Map, Value};
use std::collections::BTreeMap;

/// A building block by name.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub struct NamedBlock {
    /// Its family: `four-leg`, `perfect`, …
    pub family: String,
    /// Which construction, where there are several.
    pub construction: Option<String>,
    /// Further settings of the family.
    pub options: BTreeMap<String, String>,
    /// Seed of what is drawn at random.
    pub seed: u64,
}

impl NamedBlock {
    /// The family with its defaults.
    pub fn family(family: impl Into<String>) -> Self {
        Self { family: family.into(), ..Self::default() }
    }
    /// As it stands in a file: a name, or a table with `family` and settings. Nothing where it
    /// is neither; settings are texts, numbers or booleans.
    pub fn from_value(value: &Value) -> Option<Self> {
        match value {
            Value::String(s) => Some(Self::family(s.as_str())),
            Value::Object(map) => {
                let mut block = Self::default();
                for (key, value) in map {
                    let text = match value {
                        Value::String(s) => s.clone(),
                        Value::Number(n) => n.to_string(),
                        Value::Bool(b) => b.to_string(),
                        _ => return None,
                    };
                    match key.as_str() {
                        "family" => block.family = text,
                        "construction" => block.construction = Some(text),
                        "seed" => block.seed = text.parse().ok()?,
                        _ => {
                            block.options.insert(key.clone(), text);
                        }
                    }
                }
                (!block.family.is_empty()).then_some(block)
            }
            _ => None,
        }
    }
    /// The inverse of [`Self::from_value`].
    pub fn to_value(&self) -> Value {
        if self.construction.is_none() && self.options.is_empty() && self.seed == 0 {
            return Value::String(self.family.clone());
        }
        let mut map = Map::new();
        map.insert("family".into(), self.family.clone().into());
        if let Some(c) = &self.construction {
            map.insert("construction".into(), c.clone().into());
        }
        for (key, value) in &self.options {
            map.insert(key.clone(), value.clone().into());
        }
        if self.seed != 0 {
            map.insert("seed".into(), self.seed.into());
        }
        Value::Object(map)
    }
}

/// Where a block's numbers come from.
#[derive(Debug, Clone, PartialEq)]
pub enum BlockSource {
    /// A building block.
    Named(NamedBlock),
    /// A NumPy file beside the network's, by its relative path with `/` between folders.
    Array(String),
    /// Literal numbers, row-major.
    Values(Vec<Complex64>),
}

impl BlockSource {
    /// The family with its defaults.
    pub fn family(family: impl Into<String>) -> Self {
        Self::Named(NamedBlock::family(family))
    }
    /// As it stands in a recipe: a block's name, a table with `family` and settings, or a table
    /// with `array` and a file. Nothing where it is none of these.
    pub fn from_value(value: &Value) -> Option<Self> {
        if let Value::Object(map) = value
            && let Some(file) = map.get("array")
        {
            return (map.len() == 1).then(|| Some(Self::Array(file.as_str()?.to_owned())))?;
        }
        NamedBlock::from_value(value).map(Self::Named)
    }
    /// The inverse of [`Self::from_value`]. Literal values, which no recipe holds, become a
    /// list.
    pub fn to_value(&self) -> Value {
        match self {
            Self::Named(named) => named.to_value(),
            Self::Array(file) => serde_json::json!({ "array": file }),
            Self::Values(values) => {
                values.iter().map(|v| serde_json::json!([v.re, v.im])).collect()
            }
        }
    }
}
