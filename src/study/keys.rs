//! Unknown keys, refused with the known one that is spelt most like them.

use super::StudyError;
use crate::network::nearest;
use toml::{Table, Value};

/// Refuses the first key of `table` that `known` does not list.
///
/// # Errors
/// [`StudyError::UnknownKey`].
pub fn check(table: &Table, known: &[&str], place: &str) -> Result<(), StudyError> {
    match table.keys().find(|k| !known.contains(&k.as_str())) {
        None => Ok(()),
        Some(key) => Err(StudyError::UnknownKey {
            place: place.to_owned(),
            key: key.clone(),
            nearest: nearest(key, known).to_owned(),
        }),
    }
}

/// What kind of value it is, in words.
pub fn kind(value: &Value) -> &'static str {
    match value {
        Value::String(_) => "a text",
        Value::Integer(_) => "a whole number",
        Value::Float(_) => "a number",
        Value::Boolean(_) => "true or false",
        Value::Datetime(_) => "a date",
        Value::Array(_) => "a list",
        Value::Table(_) => "a table",
    }
}
