//! From a file to a checked network.

use super::raw::{Raw, Reader};
use super::study::{may_be_study, network_of_study};
use super::{BlockShelf, FileError, Problem};
use crate::network::limits::{Limits, Overrides};
use crate::network::recipe::{self, LegDims, Setting};
use crate::network::source::BlockSource;
use crate::network::{Layout, Network, NetworkBuilder, NetworkError};
use crate::tensor::Label;
use serde::de::DeserializeSeed;
use serde_json::{Map, Value};
use std::fs::File;
use std::io::{BufReader, Read};
use std::path::Path;

/// Reads a network file (`.toml` or `.json`), expanding a recipe where it holds one; of a study
/// file, the one network that it holds.
///
/// Memory is bounded by the network: a JSON file is read as a stream. Time is linear.
///
/// # Errors
/// [`FileError`], which names the file, the line where it is known, and the offending value.
pub fn load(path: &Path, limits: &Limits) -> Result<Network, FileError> {
    load_with(path, limits, &Overrides::default())
}

/// Like [`load`], with some settings of the file replaced.
///
/// # Errors
/// As for [`load`].
pub fn load_with(
    path: &Path,
    limits: &Limits,
    overrides: &Overrides,
) -> Result<Network, FileError> {
    if path.extension().is_some_and(|e| e == "toml") {
        let text = read_text(path, limits).map_err(|problem| problem.at(path, None))?;
        if may_be_study(&text)
            && let Some(network) = network_of_study(path, &text, limits, overrides)
        {
            return network;
        }
        return finish(path, limits, overrides, |raw| read_toml(&text, limits, raw));
    }
    load_plain(path, limits, overrides)
}

/// Reads a file that holds a network itself.
pub(super) fn load_plain(
    path: &Path,
    limits: &Limits,
    overrides: &Overrides,
) -> Result<Network, FileError> {
    match path.extension().and_then(|e| e.to_str()) {
        Some("json") => finish(path, limits, overrides, |raw| read_json(path, limits, raw)),
        Some("toml") => {
            let text = read_text(path, limits).map_err(|problem| problem.at(path, None))?;
            finish(path, limits, overrides, |raw| read_toml(&text, limits, raw))
        }
        _ => Err(Problem::Extension.at(path, None)),
    }
}

fn finish(
    path: &Path,
    limits: &Limits,
    overrides: &Overrides,
    read: impl FnOnce(&mut Raw) -> Outcome,
) -> Result<Network, FileError> {
    let mut raw = Raw::default();
    let (line, outcome) = read(&mut raw);
    let versioned = outcome.and_then(|()| {
        if raw.versioned {
            Ok(())
        } else {
            Err(Problem::MissingKey { key: "lierne", place: "the file".into() })
        }
    });
    versioned.map_err(|problem| problem.at(path, line))?;
    let folder = path.parent().unwrap_or(Path::new(""));
    let stem = path.file_stem().map(|s| s.to_string_lossy().into_owned()).unwrap_or_default();
    build(raw, folder, &stem, limits, overrides).map_err(|problem| problem.at(path, None))
}

/// Reads a network out of a table with the keys of a network file; `lierne` may be missing.
/// Arrays are looked for in `folder`; `name` serves where the table has none.
///
/// # Errors
/// [`Problem`].
pub fn from_toml(
    table: &toml::Table,
    folder: &Path,
    name: &str,
    limits: &Limits,
    overrides: &Overrides,
) -> Result<Network, Problem> {
    let mut raw = Raw::default();
    let mut slot = None;
    let reader = Reader { raw: &mut raw, slot: &mut slot, limits, recipes: recipe::FAMILIES };
    let read = reader.deserialize(table.clone());
    settle(read.map_err(|e| e.message().to_owned()), slot)?;
    build(raw, folder, name, limits, overrides)
}

fn settle(read: Result<(), String>, slot: Option<Problem>) -> Result<(), Problem> {
    match (read, slot) {
        (Ok(()), _) => Ok(()),
        (Err(_), Some(problem)) => Err(problem),
        (Err(message), None) => Err(Problem::Syntax { message }),
    }
}

fn open(path: &Path, limit: u64, advice: &'static str) -> Result<File, Problem> {
    let file = File::open(path).map_err(|reason| Problem::Unreadable { reason })?;
    let about = file.metadata().map_err(|reason| Problem::Unreadable { reason })?;
    if about.is_dir() {
        let reason = std::io::Error::from(std::io::ErrorKind::IsADirectory);
        return Err(Problem::Unreadable { reason });
    }
    if about.len() > limit {
        let what = "the file".to_owned();
        return Err(Problem::TooLarge { what, bytes: about.len(), limit, advice });
    }
    Ok(file)
}

type Outcome = (Option<usize>, Result<(), Problem>);

fn read_json(path: &Path, limits: &Limits, raw: &mut Raw) -> Outcome {
    let file = match open(path, limits.json_bytes, "") {
        Ok(file) => file,
        Err(problem) => return (None, Err(problem)),
    };
    let mut slot = None;
    // A pipe has no length: the limit holds for what is read, too.
    let text = BufReader::with_capacity(1 << 20, file.take(limits.json_bytes));
    let mut json = serde_json::Deserializer::from_reader(text);
    let reader = Reader { raw, slot: &mut slot, limits, recipes: recipe::FAMILIES };
    let read = reader.deserialize(&mut json).and_then(|()| json.end());
    match read {
        Ok(()) => (None, Ok(())),
        Err(e) => {
            let line = (e.line() > 0).then(|| e.line());
            let text = e.to_string();
            // The place is told in the same form for all files.
            let message = match text.rfind(" at line ") {
                Some(end) => text[..end].to_owned(),
                None => text,
            };
            let message = match e.classify() {
                serde_json::error::Category::Eof => "the file ends in the middle".to_owned(),
                _ => format!("not a network in JSON: {message}"),
            };
            (line, settle(Err(message), slot))
        }
    }
}

fn read_text(path: &Path, limits: &Limits) -> Result<String, Problem> {
    let advice = "; larger networks are read from JSON";
    let mut bytes = Vec::new();
    open(path, limits.toml_bytes, advice)?
        .take(limits.toml_bytes)
        .read_to_end(&mut bytes)
        .map_err(|reason| Problem::Unreadable { reason })?;
    String::from_utf8(bytes).map_err(|e| Problem::Encoding { at: e.utf8_error().valid_up_to() })
}

fn read_toml(text: &str, limits: &Limits, raw: &mut Raw) -> Outcome {
    let mut slot = None;
    let reader = Reader { raw, slot: &mut slot, limits, recipes: recipe::FAMILIES };
    let read = toml::Deserializer::parse(text).and_then(|d| reader.deserialize(d));
    match read {
        Ok(()) => (None, Ok(())),
        Err(e) => {
            let before = |s: std::ops::Range<usize>| &text.as_bytes()[..s.start.min(text.len())];
            let line = e.span().map(|s| 1 + before(s).iter().filter(|&&b| b == b'\n').count());
            let message = e.message().trim().replace('\n', "; ");
            (line, settle(Err(format!("not a network in TOML: {message}")), slot))
        }
    }
}

fn build(
    raw: Raw,
    folder: &Path,
    stem: &str,
    limits: &Limits,
    overrides: &Overrides,
) -> Result<Network, Problem> {
    let mut shelf = BlockShelf::new(folder, limits);
    let default = overrides.dimension.or(raw.dimension.map(|d| d as usize));
    let name = raw.name.clone().unwrap_or_else(|| stem.to_owned());
    if let Some((family, value)) = &raw.recipe {
        let place = "the file".to_owned();
        let other = ["boundary", "bulk", "summed"].iter().zip(raw.given).find(|(_, given)| *given);
        let clash = match other {
            _ if raw.tensors() > 0 => Some("tensor"),
            _ if raw.layout.is_some() => Some("layout"),
            Some((list, _)) => Some(*list),
            None => None,
        };
        if let Some(second) = clash {
            let (first, second) = (format!("[{family}]"), second.to_owned());
            return Err(Problem::Both { place, first, second });
        }
        let Value::Object(map) = value else {
            return Err(Problem::Syntax { message: format!("{family} must be a table") });
        };
        let given =
            raw.leg_dims.iter().map(|&(l, d)| (raw.labels.get(l as usize).to_owned(), d as usize));
        let dims = LegDims::new(default, given.collect());
        let mut setting = Setting { name, dims, limits, overrides, shelf };
        return recipe::expand(family, map, &mut setting);
    }
    if raw.tensors() == 0 {
        return Err(Problem::Empty);
    }
    explicit(&raw, name, default, &mut shelf)
}

fn explicit(
    raw: &Raw,
    name: String,
    default: Option<usize>,
    shelf: &mut BlockShelf,
) -> Result<Network, Problem> {
    let mut dims = vec![default.unwrap_or(0); raw.labels.len()];
    let mut stands = vec![false; raw.labels.len()];
    for &l in &raw.legs {
        stands[l as usize] = true;
    }
    for &(l, d) in &raw.leg_dims {
        if !stands[l as usize] {
            let label = raw.labels.get(l as usize).to_owned();
            return Err(NetworkError::Nowhere { list: "[legs]", label }.into());
        }
        dims[l as usize] = d as usize;
    }
    let tensor_name = |t: usize| raw.tensor_name(t);
    if default.is_none() {
        dims_of_arrays(raw, &mut dims, shelf)?;
    }
    let mut builder = NetworkBuilder::new(name);
    for (l, &dim) in dims.iter().enumerate() {
        builder.label(raw.labels.get(l), dim);
    }
    let mut names = crate::network::intern::Names::default();
    let mut legs: Vec<Label> = Vec::new();
    let mut leg_dims: Vec<usize> = Vec::new();
    let mut last: Option<(u32, Vec<usize>, std::sync::Arc<crate::block::Block>)> = None;
    for t in 0..raw.tensors() {
        legs.clear();
        leg_dims.clear();
        for &l in raw.legs_of(t) {
            if dims[l as usize] == 0 {
                let label = raw.labels.get(l as usize).to_owned();
                return Err(Problem::NoDimension { label, tensor: tensor_name(t) });
            }
            legs.push(Label::new(l));
            leg_dims.push(dims[l as usize]);
        }
        let number = raw.source_of[t];
        let block = match &last {
            Some((n, d, block)) if *n == number && *d == leg_dims => std::sync::Arc::clone(block),
            _ => {
                let source = &raw.sources[number as usize];
                let block = shelf.block(source, &leg_dims, &|| tensor_name(t))?;
                builder.source(&block, source.clone());
                last = Some((number, leg_dims.clone(), std::sync::Arc::clone(&block)));
                block
            }
        };
        let given = raw.tensor_names.get(t).and_then(|n| n.as_deref());
        if let Some(given) = given
            && !names.number(given).is_some_and(|(_, new)| new)
        {
            return Err(Problem::TensorTwice { name: given.to_owned() });
        }
        builder.tensor(given, &legs, &block)?;
    }
    let labels = |list: &[u32]| list.iter().map(|&l| Label::new(l)).collect::<Vec<_>>();
    builder.boundary(labels(&raw.lists[0]));
    builder.bulk(labels(&raw.lists[1]));
    builder.summed(labels(&raw.lists[2]));
    if let Some(layout) = layout(raw)? {
        builder.layout(layout);
    }
    Ok(builder.finish()?)
}

/// Where no dimension is given for all legs, arrays tell those of theirs.
fn dims_of_arrays(raw: &Raw, dims: &mut [usize], shelf: &mut BlockShelf) -> Result<(), Problem> {
    for t in 0..raw.tensors() {
        let BlockSource::Array(file) = &raw.sources[raw.source_of[t] as usize] else { continue };
        let block = shelf.array(file, &|| raw.tensor_name(t))?;
        if block.dims().len() != raw.legs_of(t).len() {
            return Err(NetworkError::LegCount {
                tensor: raw.tensor_name(t),
                named: raw.legs_of(t).len(),
                block: block.dims().len(),
            }
            .into());
        }
        for (&l, &d) in raw.legs_of(t).iter().zip(block.dims()) {
            let known = &mut dims[l as usize];
            if *known == 0 {
                *known = d;
            } else if *known != d {
                return Err(NetworkError::Dimensions {
                    label: raw.labels.get(l as usize).to_owned(),
                    known: *known,
                    found: d,
                    tensor: raw.tensor_name(t),
                }
                .into());
            }
        }
    }
    Ok(())
}

pub(in crate::network) const LAYOUT: &[&str] = &["tiling", "rings", "sheets", "cycles"];

fn layout(raw: &Raw) -> Result<Option<Layout>, Problem> {
    let mut layout = Layout::default();
    if !raw.at.is_empty() {
        if raw.at.len() != raw.tensors() {
            let message = "every tensor has `at`, or none has".to_owned();
            return Err(Problem::Syntax { message });
        }
        layout.place = raw.at.iter().map(|p| [p[0], p[1]]).collect();
        if raw.angled {
            layout.angle = raw.at.iter().map(|p| p[2]).collect();
        }
    }
    let Some(map) = &raw.layout else {
        return Ok((!raw.at.is_empty()).then_some(layout));
    };
    super::check_keys(map, LAYOUT, "[layout]")?;
    if let Some([p, q]) = numbers(map, "tiling")?.as_deref() {
        crate::tiling::Tiling::new(u64::from(*p), u64::from(*q))?;
        layout.tiling = Some((*p, *q));
    } else if map.contains_key("tiling") {
        return Err(Problem::Syntax { message: "tiling in [layout] must be [p, q]".into() });
    }
    let sheets = numbers(map, "sheets")?;
    // Several patches have a list of rings each.
    let rings: Vec<Vec<u32>> = match (map.get("rings"), &sheets) {
        (None, _) => Vec::new(),
        (Some(_), None) => vec![numbers(map, "rings")?.unwrap_or_default()],
        (Some(Value::Array(lists)), Some(_)) => {
            lists.iter().map(|l| whole_numbers(l, "rings")).collect::<Result<_, _>>()?
        }
        (Some(other), Some(_)) => return Err(not_numbers("rings", other)),
    };
    for (what, sizes) in [("rings", rings.concat()), ("sheets", sheets.clone().unwrap_or_default())]
    {
        let sum: u64 = sizes.iter().map(|&n| u64::from(n)).sum();
        if sum > raw.tensors() as u64 {
            return Err(Problem::Unfit {
                place: "[layout]".into(),
                what,
                value: format!("of {sum} tensors in all"),
                other: format!("the {} tensors of the file", raw.tensors()),
            });
        }
    }
    let spread = |sizes: &[u32]| -> Vec<u32> {
        let runs = sizes.iter().enumerate();
        runs.flat_map(|(k, &n)| std::iter::repeat_n(k as u32, n as usize)).collect()
    };
    layout.ring = rings.iter().flat_map(|sizes| spread(sizes)).collect();
    layout.sheet = spread(&sheets.unwrap_or_default());
    layout.cycles = numbers(map, "cycles")?.unwrap_or_default();
    let sum: u64 = layout.cycles.iter().map(|&n| u64::from(n)).sum();
    if !layout.cycles.is_empty() && sum != raw.lists[0].len() as u64 {
        return Err(Problem::Unfit {
            place: "[layout]".into(),
            what: "cycles",
            value: format!("of {sum} legs in all"),
            other: format!("the {} boundary legs of the file", raw.lists[0].len()),
        });
    }
    Ok(Some(layout))
}

fn numbers(map: &Map<String, Value>, key: &'static str) -> Result<Option<Vec<u32>>, Problem> {
    map.get(key).map(|value| whole_numbers(value, key)).transpose()
}

fn whole_numbers(value: &Value, key: &'static str) -> Result<Vec<u32>, Problem> {
    let list = value
        .as_array()
        .and_then(|l| l.iter().map(|v| v.as_u64().and_then(|n| u32::try_from(n).ok())).collect());
    list.ok_or_else(|| not_numbers(key, value))
}

fn not_numbers(key: &'static str, value: &Value) -> Problem {
    Problem::Word {
        key,
        place: "[layout]".into(),
        value: value.to_string().chars().take(80).collect(),
        known: "lists of whole numbers",
    }
}
