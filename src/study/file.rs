//! The study file: its keys, their meaning, and how it is read.
//!
//! A study is TOML. [`KEYS`] lists every key of every table; a key that is not listed is
//! refused with the nearest one that is.

use super::{StudyError, keys};
use serde::{Deserialize, Serialize};
use std::path::{Path, PathBuf};
use toml::{Table, Value};

/// The version of the format that this program reads.
pub const VERSION: i64 = 1;

/// Tables and their keys. `""` is the top of the file.
pub const KEYS: &[(&str, &[&str])] = &[
    (
        "",
        &[
            "study",
            "name",
            "about",
            "seed",
            "dimensions",
            "network",
            "sweep",
            "entropies",
            "codes",
            "orders",
            "budget",
            "output",
        ],
    ),
    ("sweep", &["rings", "tilings", "blocks", "constructions"]),
    ("entropies", &["intervals", "subsets", "union", "region", "measures", "spectra"]),
    ("entropies.intervals", &["lengths", "every"]),
    ("entropies.union", &["count", "parts", "seed"]),
    ("entropies.region", &["name", "sites"]),
    ("codes", &["isometry", "recover", "distance", "distance_seconds", "erasure"]),
    ("codes.erasure", &["p", "samples", "legs"]),
    ("orders", &["methods", "work", "seeds"]),
    ("budget", &["memory", "multiply_adds", "seconds", "threads"]),
    ("output", &["csv", "figures", "arrays"]),
];

/// A study as written.
#[derive(Debug, Clone, Deserialize)]
pub struct StudyFile {
    /// Format version; [`VERSION`].
    pub study: i64,
    /// What the study is called.
    pub name: Option<String>,
    /// What it is for, in a sentence or two.
    #[serde(default)]
    pub about: String,
    /// Seed of everything that is drawn; 0 by default.
    #[serde(default)]
    pub seed: u64,
    /// Leg dimensions to sweep over; none: the network's own.
    #[serde(default)]
    pub dimensions: Vec<u64>,
    /// One table or a list of tables: the keys of a network file, or `file = "…"`.
    pub network: Value,
    /// Further sweeps over a recipe.
    #[serde(default)]
    pub sweep: Sweep,
    /// Regions whose entropies are asked for.
    pub entropies: Option<Entropies>,
    /// Questions about bulk legs.
    pub codes: Option<Codes>,
    /// Contraction orders to compare.
    pub orders: Option<Orders>,
    /// What the run may use.
    #[serde(default)]
    pub budget: Budget,
    /// What is written.
    #[serde(default)]
    pub output: Output,
    /// The folder that file names in the study are relative to.
    #[serde(skip)]
    pub folder: PathBuf,
    /// The text of the file.
    #[serde(skip)]
    pub text: String,
    /// Its name, for messages.
    #[serde(skip)]
    pub place: String,
}

/// Sweeps over the keys of a tiling recipe.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Sweep {
    /// Values of `rings`.
    #[serde(default)]
    pub rings: Vec<u64>,
    /// Values of `[polygon, around]`.
    #[serde(default)]
    pub tilings: Vec<[u64; 2]>,
    /// Values of `block`.
    #[serde(default)]
    pub blocks: Vec<String>,
    /// Values of `construction`.
    #[serde(default)]
    pub constructions: Vec<String>,
}

/// Which regions, and what of them.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Entropies {
    /// `"all"`, `"none"`, or which lengths and starts.
    #[serde(default)]
    pub intervals: Intervals,
    /// Every subset of the boundary (at most [`super::regions::MOST_SUBSET_SITES`] sites).
    #[serde(default)]
    pub subsets: bool,
    /// Seeded random unions of intervals.
    #[serde(default)]
    pub union: Vec<Unions>,
    /// Regions by name.
    #[serde(default)]
    pub region: Vec<NamedRegion>,
    /// Further measures, for example `renyi-2`, `renyi-0`, `renyi-inf`.
    #[serde(default)]
    pub measures: Vec<String>,
    /// Whether spectra are kept (as `spectra.npz`).
    #[serde(default)]
    pub spectra: bool,
}

/// Which intervals.
#[derive(Debug, Clone, PartialEq, Deserialize)]
#[serde(untagged)]
pub enum Intervals {
    /// `"all"` or `"none"`.
    Word(String),
    /// Some of them.
    Some {
        /// Lengths, as numbers or `"a..b"` or `"a..b:step"` (half open); none: all.
        lengths: Option<Value>,
        /// Distance between starts; 1 by default.
        #[serde(default = "one")]
        every: u64,
    },
}

fn one() -> u64 {
    1
}

impl Default for Intervals {
    fn default() -> Self {
        Self::Word("none".into())
    }
}

/// Random unions of intervals.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct Unions {
    /// How many regions.
    pub count: u64,
    /// Numbers of intervals to draw from, each as likely as the others.
    pub parts: Vec<u64>,
    /// Own seed; by default the study's.
    pub seed: Option<u64>,
}

/// A region with a name.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct NamedRegion {
    /// The name.
    pub name: String,
    /// The region, `0..5,7..9` and so on.
    pub sites: String,
}

/// Questions about bulk legs.
#[derive(Debug, Clone, Default, Deserialize)]
pub struct Codes {
    /// Whether the map from bulk to boundary is an isometry.
    #[serde(default)]
    pub isometry: bool,
    /// Regions from which bulk legs may be recoverable.
    #[serde(default)]
    pub recover: Vec<String>,
    /// The distance of the code.
    #[serde(default)]
    pub distance: bool,
    /// Seconds after which a distance comes back as bounds; 60 by default.
    #[serde(default = "minute")]
    pub distance_seconds: f64,
    /// An erasure curve.
    pub erasure: Option<Erasure>,
}

/// An erasure curve.
#[derive(Debug, Clone, PartialEq, Deserialize)]
pub struct Erasure {
    /// Erasure rates: numbers or `"a..b:step"` (both ends included).
    pub p: Value,
    /// Samples a rate.
    #[serde(default = "thousand")]
    pub samples: u64,
    /// `"all"` or `"centre"`.
    #[serde(default = "all")]
    pub legs: String,
}

fn minute() -> f64 {
    60.0
}

fn thousand() -> u64 {
    1000
}

fn all() -> String {
    "all".into()
}

/// Contraction orders to compare.
#[derive(Debug, Clone, Deserialize)]
pub struct Orders {
    /// Methods by name; none: the portfolio alone.
    #[serde(default)]
    pub methods: Vec<String>,
    /// Work a method and seed may spend, in labels touched; 2·10^8 by default. The same work
    /// gives the same order on every machine.
    #[serde(default = "much")]
    pub work: u64,
    /// Seeds a method, counted up from the study's; 1 by default.
    #[serde(default = "one")]
    pub seeds: u64,
}

fn much() -> u64 {
    200_000_000
}

/// What the run may use.
#[derive(Debug, Clone, Default, Deserialize, Serialize)]
pub struct Budget {
    /// Memory for a contraction: bytes, or a text such as `"2GiB"`.
    pub memory: Option<Value>,
    /// Multiply-adds that one region may cost.
    pub multiply_adds: Option<f64>,
    /// Seconds for the whole run; what is not finished then waits for the next run.
    pub seconds: Option<f64>,
    /// Threads; by default every core.
    pub threads: Option<u64>,
}

/// What is written besides `result.json` and `report.html`.
#[derive(Debug, Clone, Deserialize)]
pub struct Output {
    /// Tables; on by default.
    #[serde(default = "yes")]
    pub csv: bool,
    /// Pictures; on by default.
    #[serde(default = "yes")]
    pub figures: bool,
    /// Arrays; on by default.
    #[serde(default = "yes")]
    pub arrays: bool,
}

fn yes() -> bool {
    true
}

impl Default for Output {
    fn default() -> Self {
        Self { csv: true, figures: true, arrays: true }
    }
}

impl StudyFile {
    /// Reads a study from a file.
    ///
    /// # Errors
    /// [`StudyError::Read`] and those of [`Self::parse`].
    pub fn load(path: &Path) -> Result<Self, StudyError> {
        let text = std::fs::read_to_string(path)
            .map_err(|cause| StudyError::Read { path: path.to_owned(), cause })?;
        let folder = path.parent().map(Path::to_owned).unwrap_or_default();
        Self::parse(&text, &path.display().to_string(), &folder)
    }

    /// Reads a study from its text. `place` names it in messages; file names in it are
    /// relative to `folder`.
    ///
    /// # Errors
    /// [`StudyError::Syntax`], [`StudyError::UnknownKey`], [`StudyError::Version`],
    /// [`StudyError::Missing`], [`StudyError::Value`].
    pub fn parse(text: &str, place: &str, folder: &Path) -> Result<Self, StudyError> {
        let syntax = |e: toml::de::Error| StudyError::Syntax {
            place: e.span().map_or_else(
                || place.to_owned(),
                |s| {
                    let before = text.get(..s.start).unwrap_or("");
                    let line = before.matches('\n').count() + 1;
                    format!("{place}, line {line}")
                },
            ),
            message: e.message().replace('\n', " "),
        };
        let table: Table = toml::from_str(text).map_err(syntax)?;
        if let Some(Value::Integer(found)) = table.get("study")
            && *found != VERSION
        {
            return Err(StudyError::Version {
                place: place.to_owned(),
                found: *found,
                known: VERSION,
            });
        }
        check_keys(&table, place)?;
        for key in ["study", "network"] {
            if !table.contains_key(key) {
                return Err(StudyError::Missing { place: place.to_owned(), key });
            }
        }
        let mut file: Self = toml::from_str(text).map_err(syntax)?;
        if file.entropies.is_none() && file.codes.is_none() && file.orders.is_none() {
            return Err(StudyError::Missing { place: place.to_owned(), key: "entropies" });
        }
        file.folder = folder.to_owned();
        text.clone_into(&mut file.text);
        place.clone_into(&mut file.place);
        file.check_values()?;
        super::questions::all(&file)?;
        Ok(file)
    }

    /// The study's name: as given, or the file's.
    pub fn shown_name(&self) -> String {
        self.name.clone().unwrap_or_else(|| {
            Path::new(&self.place)
                .file_stem()
                .map_or_else(|| "study".into(), |s| s.to_string_lossy().into_owned())
        })
    }

    fn check_values(&self) -> Result<(), StudyError> {
        let bad = |table: &str, key: &str, value: String, why: &str| StudyError::Value {
            place: format!("{}, {table}", self.place),
            key: key.into(),
            value,
            why: why.into(),
        };
        if let Some(&d) = self.dimensions.iter().find(|&&d| d < 2) {
            return Err(bad("top", "dimensions", d.to_string(), "is below 2"));
        }
        if let Some(e) = &self.entropies {
            if let Intervals::Word(w) = &e.intervals
                && w != "all"
                && w != "none"
            {
                return Err(bad(
                    "[entropies]",
                    "intervals",
                    format!("{w:?}"),
                    "is neither \"all\" nor \"none\" nor a table of lengths",
                ));
            }
            if let Intervals::Some { every: 0, .. } = e.intervals {
                return Err(bad("[entropies]", "every", "0".into(), "would never move on"));
            }
            if let Some(m) = e.measures.iter().find(|m| super::ask::Measure::parse(m).is_none()) {
                return Err(bad(
                    "[entropies]",
                    "measures",
                    format!("{m:?}"),
                    "is no measure; known are renyi-0, renyi-2, renyi-inf and the like",
                ));
            }
            for u in &e.union {
                if u.parts.is_empty() || u.parts.contains(&0) {
                    return Err(bad(
                        "[[entropies.union]]",
                        "parts",
                        format!("{:?}", u.parts),
                        "must list numbers of intervals, each at least 1",
                    ));
                }
            }
        }
        for (key, value) in
            [("seconds", self.budget.seconds), ("multiply_adds", self.budget.multiply_adds)]
        {
            if let Some(v) = value
                && !(v.is_finite() && v >= 0.0)
            {
                return Err(bad("[budget]", key, v.to_string(), "is no amount"));
            }
        }
        self.memory().map(drop)
    }

    /// The memory of `[budget]` in bytes, where given.
    ///
    /// # Errors
    /// [`StudyError::Value`].
    pub fn memory(&self) -> Result<Option<u64>, StudyError> {
        let Some(value) = &self.budget.memory else { return Ok(None) };
        let bytes = match value {
            Value::Integer(n) => u64::try_from(*n).ok(),
            Value::String(text) => bytes(text),
            _ => None,
        };
        bytes.map(Some).ok_or_else(|| StudyError::Value {
            place: format!("{}, [budget]", self.place),
            key: "memory".into(),
            value: value.to_string(),
            why: "is no size; write for example \"2GiB\"".into(),
        })
    }
}

/// A size with a unit, in bytes.
fn bytes(text: &str) -> Option<u64> {
    let t = text.trim();
    let split = t.find(|c: char| !(c.is_ascii_digit() || c == '.')).unwrap_or(t.len());
    let number: f64 = t[..split].parse().ok()?;
    let power = match t[split..].trim() {
        "" | "B" => 1.0,
        "KiB" => 1024.0,
        "MiB" => 1024f64.powi(2),
        "GiB" => 1024f64.powi(3),
        "TiB" => 1024f64.powi(4),
        "kB" => 1e3,
        "MB" => 1e6,
        "GB" => 1e9,
        "TB" => 1e12,
        _ => return None,
    };
    let b = number * power;
    (b.is_finite() && b < 1.8e19).then_some(b as u64)
}

fn check_keys(table: &Table, place: &str) -> Result<(), StudyError> {
    for (path, known) in KEYS {
        let mut here: Vec<&Table> = vec![table];
        for step in path.split('.').filter(|s| !s.is_empty()) {
            here = here
                .into_iter()
                .filter_map(|t| t.get(step))
                .flat_map(|v| match v {
                    Value::Table(t) => vec![t],
                    Value::Array(a) => a.iter().filter_map(Value::as_table).collect(),
                    _ => vec![],
                })
                .collect();
        }
        let shown =
            if path.is_empty() { place.to_owned() } else { format!("{place}, table {path}") };
        for t in here {
            keys::check(t, known, &shown)?;
        }
    }
    Ok(())
}

/// A list of whole numbers: a number, a list, `"a..b"` or `"a..b:step"` (half open).
pub(super) fn whole_numbers(value: &Value) -> Option<Vec<u64>> {
    match value {
        Value::Integer(n) => Some(vec![u64::try_from(*n).ok()?]),
        Value::Array(a) => a
            .iter()
            .map(|v| v.as_integer().and_then(|n| u64::try_from(n).ok()))
            .collect::<Option<Vec<_>>>(),
        Value::String(text) => {
            let (range, step) = text.split_once(':').unwrap_or((text, "1"));
            let (a, b) = range.split_once("..")?;
            let (a, b, step): (u64, u64, usize) =
                (a.trim().parse().ok()?, b.trim().parse().ok()?, step.trim().parse().ok()?);
            (step > 0 && b.saturating_sub(a) < 1 << 24).then(|| (a..b).step_by(step).collect())
        }
        _ => None,
    }
}

/// A list of rates: a number, a list, or `"a..b:step"` with both ends included.
pub(super) fn rates(value: &Value) -> Option<Vec<f64>> {
    let number = |v: &Value| v.as_float().or_else(|| v.as_integer().map(|n| n as f64));
    let list = match value {
        Value::Array(a) => a.iter().map(number).collect::<Option<Vec<_>>>()?,
        Value::String(text) => {
            let (range, step) = text.split_once(':')?;
            let (a, b) = range.split_once("..")?;
            let (a, b, step): (f64, f64, f64) =
                (a.trim().parse().ok()?, b.trim().parse().ok()?, step.trim().parse().ok()?);
            if !(step > 0.0 && (b - a) / step < 1e4) {
                return None;
            }
            let n = ((b - a) / step + 1e-9).floor() as i64;
            (0..=n).map(|k| a + k as f64 * step).collect()
        }
        v => vec![number(v)?],
    };
    (!list.is_empty() && list.iter().all(|p| (0.0..=1.0).contains(p))).then_some(list)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(text: &str) -> Result<StudyFile, StudyError> {
        StudyFile::parse(text, "s.toml", Path::new("."))
    }

    const SMALL: &str = "study = 1\n[network]\nfile = \"n.toml\"\n[entropies]\n";

    #[test]
    fn a_small_study_is_read() {
        let s = read(&format!("{SMALL}intervals = \"all\"\n")).unwrap();
        assert_eq!(s.seed, 0);
        assert_eq!(s.shown_name(), "s");
        assert_eq!(s.entropies.unwrap().intervals, Intervals::Word("all".into()));
    }

    #[test]
    fn what_is_wrong_is_named_with_its_place() {
        let table = [
            ("study = 2\n", "study = 2, but this program reads version 1"),
            (
                "study = 1\nnetwrk = 3\n",
                "unknown key \"netwrk\"; the nearest known key is \"network\"",
            ),
            ("study = 1\n[entropies]\nintervals = \"all\"\n", "needs the key \"network\""),
            (
                "study = 1\n[network]\nfile = \"n\"\n[entropies]\n[[entropies.union]]\ncuont = 3\n",
                "table entropies.union: unknown key \"cuont\"; the nearest known key is \"count\"",
            ),
            ("study = 1\nname = [\n", "s.toml, line "),
            ("study = 1\n[network]\nfile = \"n\"\n", "needs the key \"entropies\""),
            (
                "study = 1\n[network]\n[entropies]\n[budget]\nmemory = \"2 cows\"\n",
                "memory = \"2 cows\" is no size",
            ),
            (
                "study = 1\n[network]\n[entropies]\nintervals = \"some\"\n",
                "neither \"all\" nor \"none\"",
            ),
            ("study = 1\ndimensions = [1]\n[network]\n[entropies]\n", "dimensions = 1 is below 2"),
        ];
        for (text, wanted) in table {
            let said = read(text).unwrap_err().to_string();
            assert!(said.contains(wanted), "{text:?}\nsaid  {said}\nwants {wanted}");
            assert!(!said.contains('\n'), "{said}");
        }
    }

    #[test]
    fn numbers_are_listed_in_all_their_spellings() {
        assert_eq!(whole_numbers(&Value::String("1..8:3".into())), Some(vec![1, 4, 7]));
        assert_eq!(whole_numbers(&Value::Integer(4)), Some(vec![4]));
        assert_eq!(whole_numbers(&Value::String("1..".into())), None);
        let p = rates(&Value::String("0.1..0.3:0.1".into())).unwrap();
        assert_eq!(p.len(), 3);
        assert_eq!(rates(&Value::Float(1.5)), None);
    }
}
