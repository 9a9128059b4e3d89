//! Networks to files.

use super::{FileError, Problem};
use crate::network::source::BlockSource;
use crate::network::{Layout, Network, TensorId};
use crate::tensor::Label;
use num_complex::Complex64;
use serde_json::{Value, json};
use std::collections::BTreeMap;
use std::fs::{self, File};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

/// Which notation.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Format {
    /// TOML.
    Toml,
    /// JSON.
    Json,
}

/// Blocks without a name and of at most so many entries are written as literal values.
const LITERAL: u64 = 4096;

/// Writes the explicit network to a `.toml` or `.json` file. Arrays go beside it. Nothing is
/// left half-written: each file is written beside its place and renamed.
///
/// # Errors
/// [`FileError`].
pub fn save(network: &Network, path: &Path) -> Result<(), FileError> {
    let format = match path.extension().and_then(|e| e.to_str()) {
        Some("toml") => Format::Toml,
        Some("json") => Format::Json,
        _ => return Err(Problem::Extension.at(path, None)),
    };
    let stem = path.file_stem().map(|s| s.to_string_lossy().into_owned()).unwrap_or_default();
    let written = arrays(network, path.parent().unwrap_or(Path::new("")), &stem).and_then(|made| {
        beside(path, |out| {
            let mut out = BufWriter::with_capacity(1 << 20, out);
            write(network, format, &made, &mut out)?;
            out.flush()
        })
    });
    written.map_err(|reason| Problem::Unwritable { reason }.at(path, None))
}

/// The explicit network as text. Blocks that only an array file could hold are refused.
///
/// # Errors
/// [`Problem::Unwritable`].
pub fn to_bytes(network: &Network, format: Format) -> Result<Vec<u8>, Problem> {
    let mut made = BTreeMap::new();
    for (k, source) in network.sources().iter().enumerate() {
        if source.is_none() {
            let source = literal(network, k).ok_or_else(|| Problem::Unwritable {
                reason: io::Error::other("a block without a name is too large for a text"),
            })?;
            made.insert(k, source);
        }
    }
    let mut out = Vec::new();
    match write(network, format, &made, &mut out) {
        Ok(()) => Ok(out),
        Err(reason) => Err(Problem::Unwritable { reason }),
    }
}

fn beside(path: &Path, fill: impl FnOnce(&mut File) -> io::Result<()>) -> io::Result<()> {
    let name = path.file_name().ok_or_else(|| io::Error::from(io::ErrorKind::InvalidInput))?;
    let mut draft = path.to_path_buf();
    draft.set_file_name(format!(".{}.{}.part", name.to_string_lossy(), std::process::id()));
    let done = File::create(&draft)
        .and_then(|mut file| fill(&mut file))
        .and_then(|()| fs::rename(&draft, path));
    if done.is_err() {
        let _ = fs::remove_file(&draft);
    }
    done
}

fn literal(network: &Network, block: usize) -> Option<BlockSource> {
    let block = &network.blocks()[block];
    let size = block.dims().iter().try_fold(1u64, |s, &d| s.checked_mul(d as u64))?;
    (size <= LITERAL).then(|| {
        BlockSource::Values(block.entries().to_dense().to_complex().iter().copied().collect())
    })
}

/// Writes what array files the network needs and says what stands for each nameless block.
fn arrays(
    network: &Network,
    folder: &Path,
    stem: &str,
) -> io::Result<BTreeMap<usize, BlockSource>> {
    let mut made = BTreeMap::new();
    let put = |path: PathBuf, block: usize| -> io::Result<()> {
        if let Some(folder) = path.parent().filter(|f| !f.as_os_str().is_empty()) {
            fs::create_dir_all(folder)?;
        }
        let numbers = network.blocks()[block].entries().to_dense().to_complex();
        beside(&path, |out| {
            use ndarray_npy::WriteNpyExt;
            let mut out = BufWriter::with_capacity(1 << 20, out);
            numbers.write_npy(&mut out).map_err(io::Error::other)?;
            out.flush()
        })
    };
    for (k, source) in network.sources().iter().enumerate() {
        match source {
            Some(BlockSource::Array(file)) if !folder.join(file).exists() => {
                put(folder.join(file), k)?;
            }
            Some(_) => {}
            None => {
                let source = match literal(network, k) {
                    Some(values) => values,
                    None => {
                        let file = format!("{stem}.block{k}.npy");
                        put(folder.join(&file), k)?;
                        BlockSource::Array(file)
                    }
                };
                made.insert(k, source);
            }
        }
    }
    Ok(made)
}

/// A text in quotes, as both notations read it.
fn quoted(text: &str) -> String {
    json!(text).to_string().replace('\u{7f}', "\\u007f")
}

fn number(x: f64) -> String {
    // Both notations read back what this prints, to the last bit.
    if x.is_finite() { format!("{x:?}") } else { "0.0".to_owned() }
}

/// A plain value in either notation.
fn plain(value: &Value, format: Format) -> String {
    match value {
        Value::Object(map) if format == Format::Toml => {
            let parts: Vec<String> =
                map.iter().map(|(k, v)| format!("{} = {}", key(k), plain(v, format))).collect();
            format!("{{ {} }}", parts.join(", "))
        }
        Value::Array(list) if format == Format::Toml => {
            let parts: Vec<String> = list.iter().map(|v| plain(v, format)).collect();
            format!("[{}]", parts.join(", "))
        }
        Value::String(s) => quoted(s),
        other => other.to_string(),
    }
}

/// A key of a TOML table, bare where it may be.
fn key(text: &str) -> String {
    let bare = |c: char| c.is_ascii_alphanumeric() || c == '_' || c == '-';
    if !text.is_empty() && text.chars().all(bare) { text.to_owned() } else { quoted(text) }
}

fn source_text(source: &BlockSource, format: Format) -> (&'static str, String) {
    match source {
        BlockSource::Named(named) => ("block", plain(&named.to_value(), format)),
        BlockSource::Array(file) => ("array", quoted(file)),
        BlockSource::Values(values) => {
            let one = |v: &Complex64| {
                if v.im == 0.0 && !v.im.is_sign_negative() {
                    number(v.re)
                } else {
                    format!("[{}, {}]", number(v.re), number(v.im))
                }
            };
            let list: Vec<String> = values.iter().map(one).collect();
            ("values", format!("[{}]", list.join(", ")))
        }
    }
}

/// The dimension that most labels have; the larger of equals.
fn usual_dimension(network: &Network) -> usize {
    let mut counts: BTreeMap<usize, usize> = BTreeMap::new();
    for l in 0..network.labels() {
        *counts.entry(network.dim(Label::new(l as u32))).or_default() += 1;
    }
    counts.into_iter().max_by_key(|&(dim, count)| (count, dim)).map_or(1, |(dim, _)| dim)
}

fn layout_values(layout: &Layout, tensors: usize) -> Vec<(&'static str, Value)> {
    let mut values = Vec::new();
    if let Some((p, q)) = layout.tiling {
        values.push(("tiling", json!([p, q])));
    }
    let runs = |of: &[u32]| -> Vec<usize> {
        let mut sizes = vec![0; of.iter().max().map_or(0, |&m| m as usize + 1)];
        for &k in of {
            sizes[k as usize] += 1;
        }
        sizes
    };
    if layout.sheet.is_empty() {
        if !layout.ring.is_empty() && layout.ring.is_sorted() && layout.ring.len() <= tensors {
            values.push(("rings", json!(runs(&layout.ring))));
        }
    } else if layout.sheet.is_sorted() && layout.ring.len() == layout.sheet.len() {
        let sheets = runs(&layout.sheet);
        let mut first = 0;
        let mut rings = Vec::new();
        for &n in &sheets {
            rings.push(runs(&layout.ring[first..first + n]));
            first += n;
        }
        values.push(("sheets", json!(sheets)));
        values.push(("rings", json!(rings)));
    }
    if !layout.cycles.is_empty() {
        values.push(("cycles", json!(layout.cycles)));
    }
    values
}

fn write(
    network: &Network,
    format: Format,
    made: &BTreeMap<usize, BlockSource>,
    out: &mut dyn Write,
) -> io::Result<()> {
    let toml = format == Format::Toml;
    let usual = usual_dimension(network);
    let odd: Vec<Label> =
        (0..network.labels() as u32).map(Label::new).filter(|&l| network.dim(l) != usual).collect();
    let layout = network.layout().map(|l| layout_values(l, network.tensors())).unwrap_or_default();
    let lists =
        [("boundary", network.boundary()), ("bulk", network.bulk()), ("summed", network.summed())];
    if toml {
        writeln!(out, "lierne = 1\nname = {}\ndimension = {usual}", quoted(network.name()))?;
    } else {
        write!(
            out,
            "{{\n\"lierne\": 1,\n\"name\": {},\n\"dimension\": {usual},\n",
            quoted(network.name())
        )?;
    }
    for (list, labels) in lists {
        if labels.is_empty() && list == "summed" {
            continue;
        }
        if toml {
            write!(out, "{list} = [")?;
        } else {
            write!(out, "\"{list}\": [")?;
        }
        for (k, &l) in labels.iter().enumerate() {
            let comma = if k == 0 { "" } else { ", " };
            write!(out, "{comma}{}", quoted(network.label_name(l)))?;
        }
        writeln!(out, "]{}", if toml { "" } else { "," })?;
    }
    if toml {
        if !odd.is_empty() {
            writeln!(out, "\n[legs]")?;
            for &l in &odd {
                writeln!(out, "{} = {}", key(network.label_name(l)), network.dim(l))?;
            }
        }
        if !layout.is_empty() {
            writeln!(out, "\n[layout]")?;
            for (k, v) in &layout {
                writeln!(out, "{k} = {}", plain(v, format))?;
            }
        }
    } else {
        if !odd.is_empty() {
            let part =
                |l: &Label| format!("{}: {}", quoted(network.label_name(*l)), network.dim(*l));
            let parts: Vec<String> = odd.iter().map(part).collect();
            writeln!(out, "\"legs\": {{{}}},", parts.join(", "))?;
        }
        if !layout.is_empty() {
            let parts: Vec<String> = layout.iter().map(|(k, v)| format!("\"{k}\": {v}")).collect();
            writeln!(out, "\"layout\": {{{}}},", parts.join(", "))?;
        }
        write!(out, "\"tensor\": [")?;
    }
    let texts: Vec<(&str, String)> = (0..network.blocks().len())
        .map(|k| {
            let source = network.sources()[k].as_ref().or(made.get(&k));
            source_text(source.expect("every block has a source by now"), format)
        })
        .collect();
    for t in network.tensor_ids() {
        tensor(network, t, &texts, toml, out)?;
    }
    if !toml {
        write!(out, "\n]\n}}\n")?;
    }
    Ok(())
}

fn tensor(
    network: &Network,
    t: TensorId,
    texts: &[(&str, String)],
    toml: bool,
    out: &mut dyn Write,
) -> io::Result<()> {
    if toml {
        writeln!(out, "\n[[tensor]]")?;
    } else {
        write!(out, "{}\n{{", if t.index() == 0 { "" } else { "," })?;
    }
    if let Some(name) = network.given_name(t) {
        if toml {
            writeln!(out, "name = {}", quoted(name))?;
        } else {
            write!(out, "\"name\": {}, ", quoted(name))?;
        }
    }
    out.write_all(if toml { b"legs = [" } else { b"\"legs\": [" })?;
    for (k, &l) in network.legs(t).iter().enumerate() {
        if k > 0 {
            out.write_all(b", ")?;
        }
        let label = network.label_name(l);
        if label.bytes().all(|b| b.is_ascii_alphanumeric()) {
            out.write_all(b"\"")?;
            out.write_all(label.as_bytes())?;
            out.write_all(b"\"")?;
        } else {
            out.write_all(quoted(label).as_bytes())?;
        }
    }
    let (key, text) = &texts[network.block_number(t)];
    if toml {
        write!(out, "]\n{key} = {text}\n")?;
    } else {
        write!(out, "], \"{key}\": {text}")?;
    }
    if let Some(layout) = network.layout()
        && layout.place.len() == network.tensors()
    {
        let mut at = layout.place[t.index()].to_vec();
        at.extend(layout.angle.get(t.index()));
        let list: Vec<String> = at.into_iter().map(number).collect();
        if toml {
            writeln!(out, "at = [{}]", list.join(", "))?;
        } else {
            write!(out, ", \"at\": [{}]", list.join(", "))?;
        }
    }
    if !toml {
        out.write_all(b"}")?;
    }
    Ok(())
}
