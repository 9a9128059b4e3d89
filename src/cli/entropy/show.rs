//! Text, JSON and CSV.

use super::super::common::show_bytes;
use super::super::{Common, Failure};
use super::Args;
use super::ask::{Found, Row};
use crate::entropy::measure::{Measure, Measured};
use crate::entropy::{Answer, Evidence, LogFit};
use crate::network::{Network, Region};
use serde_json::{Map, Value, json};

/// Most levels of a spectrum that are printed.
const MOST_LEVELS: usize = 10_000;

/// A number as JSON, rounded to the digits it has; −0 and not-finite numbers tidied.
fn number(x: f64) -> Value {
    if !x.is_finite() {
        return Value::Null;
    }
    let text = format!("{x:.11e}");
    json!(text.parse::<f64>().unwrap_or(x) + 0.0)
}

struct Shown {
    region: String,
    sites: usize,
    cut: f64,
    lower: f64,
    upper: f64,
    error: f64,
    evidence: Evidence,
    entropy: Option<f64>,
}

fn shown(network: &Network, row: &Row) -> Shown {
    let (cut, lower, upper, error, evidence, entropy) = match &row.answer {
        Found::Full(a) => (a.cut.nats, a.lower, a.upper, a.error, a.evidence, a.entropy()),
        Found::Table { cut, entropy, evidence } => match evidence {
            Evidence::Bounds => (*cut, 0.0, *cut, 0.0, *evidence, None),
            _ => (*cut, *entropy, *entropy, 0.0, *evidence, Some(*entropy)),
        },
    };
    Shown {
        region: row.region.show(network),
        sites: row.region.sites(),
        cut,
        lower,
        upper,
        error,
        evidence,
        entropy,
    }
}

/// Everything about plain regions.
pub(super) fn print(
    args: &Args,
    network: &Network,
    rows: &[Row],
    negativity: &[Measured],
    averages: Option<&[(usize, f64)]>,
    fitted: Option<LogFit>,
    common: &Common,
) -> Result<(), Failure> {
    let unit = network.boundary_dim().filter(|&d| d > 1).map(|d| (d as f64).ln());
    if common.json {
        return as_json(args, network, rows, negativity, averages, fitted, unit, common);
    }
    let legs = |x: f64| unit.map_or_else(|| "-".into(), |u| format!("{:.6}", x / u));
    if args.csv {
        let mut head = "region,sites,cut_legs,cut_nats,entropy_legs,entropy_nats,lower_nats,\
                        upper_nats,error_nats,evidence"
            .to_owned();
        for m in &args.measure {
            head.push_str(&format!(",{m}"));
        }
        common.say(head);
        for (k, row) in rows.iter().enumerate() {
            let s = shown(network, row);
            let optional = |x: Option<f64>| x.map_or_else(String::new, |x| format!("{x:.11}"));
            let mut line = format!(
                "\"{}\",{},{},{:.11},{},{},{:.11},{:.11},{:.1e},{}",
                s.region,
                s.sites,
                optional(unit.map(|u| s.cut / u)),
                s.cut,
                optional(s.entropy.and_then(|x| unit.map(|u| x / u))),
                optional(s.entropy),
                s.lower,
                s.upper,
                s.error,
                s.evidence
            );
            for m in &args.measure {
                let value = measured(row, *m, negativity.get(k)).and_then(|v| v.value());
                line.push_str(&format!(",{}", optional(value)));
            }
            common.say(line);
        }
        return Ok(());
    }
    let unit_name = network.boundary_dim().map_or("-".into(), |d| format!("log {d}"));
    common.say(format_args!(
        "{:<24} {:>6} {:>10} {:>12} {:>14}  evidence   (legs: units of {unit_name})",
        "region", "sites", "cut/legs", "S/legs", "S/nats"
    ));
    for (k, row) in rows.iter().enumerate() {
        let s = shown(network, row);
        let (in_legs, in_nats) = match s.entropy {
            Some(x) => (legs(x), format!("{x:.9}")),
            None => (
                format!("{}..{}", legs(s.lower), legs(s.upper)),
                format!("{:.6}..{:.6}", s.lower, s.upper),
            ),
        };
        common.say(format_args!(
            "{:<24} {:>6} {:>10} {:>12} {:>14}  {}",
            s.region,
            s.sites,
            legs(s.cut),
            in_legs,
            in_nats,
            s.evidence
        ));
        for m in &args.measure {
            if let Some(v) = measured(row, *m, negativity.get(k)) {
                common.say(format_args!("    {m}: {}", value(&v)));
            }
        }
        if let Found::Full(a) = &row.answer {
            if args.spectrum {
                spectrum(a, common);
            }
            if args.explain {
                explain(network, a, common);
            }
        }
    }
    if let Some(averages) = averages {
        common.say("average over all positions, nats:");
        for (l, s) in averages {
            common.say(format_args!("{l:>6} {s:.9}"));
        }
        if let Some(f) = fitted {
            common.say(format_args!(
                "S(l) = (c/3) ln((N/π) sin(πl/N)) + s: c = {:.4} ± {:.4}, s = {:.4} ± {:.4} nats",
                f.charge, f.charge_error, f.constant, f.constant_error
            ));
        }
    }
    Ok(())
}

fn value(m: &Measured) -> String {
    match m.value() {
        Some(v) => format!("{v:.9} nats ({})", m.evidence),
        None => format!("{:.6}..{:.6} nats ({})", m.lower, m.upper, m.evidence),
    }
}

fn measured(row: &Row, measure: Measure, negativity: Option<&Measured>) -> Option<Measured> {
    match (&row.answer, measure) {
        (_, Measure::Negativity) => negativity.copied(),
        (Found::Full(a), Measure::Entropy) => Some(Measured::entropy(a)),
        (Found::Full(a), Measure::Renyi(alpha)) => Some(Measured::renyi(a, alpha)),
        // The table holds stabilizer states alone, whose spectra are flat.
        (Found::Table { entropy, evidence, .. }, Measure::Entropy | Measure::Renyi(_)) => {
            Some(Measured { lower: *entropy, upper: *entropy, evidence: *evidence, error: 0.0 })
        }
        _ => None,
    }
}

fn spectrum(a: &Answer, common: &Common) {
    match a.spectrum.as_ref().and_then(|s| s.levels(MOST_LEVELS)) {
        Some(levels) => {
            for l in levels {
                common.say(format_args!("    {:.12e} × {}", l.probability, l.multiplicity));
            }
        }
        None => common.say("    the spectrum is not known or has more than 10000 levels"),
    }
}

/// How a number was found, in a few sentences.
fn explain(network: &Network, a: &Answer, common: &Common) {
    let names = |labels: &[crate::tensor::Label]| {
        let shown: Vec<&str> = labels.iter().take(12).map(|&l| network.label_name(l)).collect();
        let more = labels.len().saturating_sub(12);
        if more > 0 { format!("{} and {more} more", shown.join(", ")) } else { shown.join(", ") }
    };
    common.say(format_args!(
        "    The minimal cut severs {} labels ({}), {:.6} nats, and is {}.",
        a.cut.near.len(),
        names(&a.cut.near),
        a.cut.nats,
        if a.cut.unique() { "the only one" } else { "not the only one" }
    ));
    if a.parts.is_empty() {
        common.say(
            "    Isometries absorb every tensor from the two sides, so the cut between them is \
             exact and the spectrum flat.",
        );
        return;
    }
    common.say(format_args!(
        "    Isometries absorb all but {} tensors; wires that run straight from one side to the \
         other carry {:.6} nats.",
        a.cores.iter().map(Vec::len).sum::<usize>(),
        a.straight
    ));
    for (part, tensors) in a.parts.iter().zip(&a.cores) {
        let shown: Vec<String> = tensors.iter().take(8).map(|&t| network.tensor_name(t)).collect();
        let more = tensors.len().saturating_sub(8);
        let list = if more > 0 {
            format!("{} and {more} more", shown.join(", "))
        } else {
            shown.join(", ")
        };
        let how = match part.evidence {
            Evidence::Geometry => "follows from isometries alone".to_owned(),
            Evidence::FiniteField => format!(
                "is a stabilizer state: ranks over prime fields give {:.6} nats exactly",
                part.upper
            ),
            Evidence::Contraction => format!(
                "was contracted to a matrix whose singular values give {:.9} ± {:.0e} nats",
                part.upper, part.error
            ),
            Evidence::Estimate => format!(
                "was estimated from random vectors: {:.4} ± {:.4} nats, proven within \
                 {:.4}..{:.4}",
                part.estimate.map_or(f64::NAN, |e| e.0),
                part.error,
                part.lower,
                part.upper
            ),
            Evidence::Bounds => {
                let price = part.price.map_or_else(String::new, |p| {
                    format!(
                        "; exactly it would take 10^{:.1} multiply-adds and {}",
                        p.log10_multiply_adds(),
                        show_bytes(p.log2_bytes.exp2())
                    )
                });
                let why = part.reason.map_or_else(String::new, |r| format!(" (it takes {r})"));
                format!("is left between {:.6} and {:.6} nats{why}{price}", part.lower, part.upper)
            }
        };
        common.say(format_args!("    The core of {list} {how}."));
    }
}

#[allow(clippy::too_many_arguments)]
fn as_json(
    args: &Args,
    network: &Network,
    rows: &[Row],
    negativity: &[Measured],
    averages: Option<&[(usize, f64)]>,
    fitted: Option<LogFit>,
    unit: Option<f64>,
    common: &Common,
) -> Result<(), Failure> {
    let in_legs = |x: f64| unit.map_or(Value::Null, |u| number(x / u));
    let mut out = Vec::with_capacity(rows.len());
    for (k, row) in rows.iter().enumerate() {
        let s = shown(network, row);
        let mut o = Map::new();
        o.insert("region".into(), json!(s.region));
        o.insert("sites".into(), json!(s.sites));
        o.insert("cut_legs".into(), in_legs(s.cut));
        o.insert("cut_nats".into(), number(s.cut));
        o.insert("entropy_nats".into(), s.entropy.map_or(Value::Null, number));
        o.insert("entropy_legs".into(), s.entropy.map_or(Value::Null, in_legs));
        o.insert("lower_legs".into(), in_legs(s.lower));
        o.insert("upper_legs".into(), in_legs(s.upper));
        o.insert("lower_nats".into(), number(s.lower));
        o.insert("upper_nats".into(), number(s.upper));
        o.insert("evidence".into(), json!(s.evidence));
        o.insert("error_nats".into(), number(s.error));
        if let Found::Full(a) = &row.answer {
            o.insert("cut_unique".into(), json!(a.cut.unique()));
            if args.explain {
                let labels: Vec<&str> = a.cut.near.iter().map(|&l| network.label_name(l)).collect();
                o.insert("cut".into(), json!(labels));
                let cores: Vec<Vec<String>> = a
                    .cores
                    .iter()
                    .map(|c| c.iter().map(|&t| network.tensor_name(t)).collect())
                    .collect();
                o.insert("cores".into(), json!(cores));
            }
            if let (Evidence::Bounds | Evidence::Estimate, Some(p)) = (s.evidence, a.price()) {
                o.insert(
                    "price".into(),
                    json!({
                        "log10_multiply_adds": number(p.log10_multiply_adds()),
                        "log2_bytes": number(p.log2_bytes),
                    }),
                );
            }
            if args.spectrum {
                let levels = a.spectrum.as_ref().and_then(|s| s.levels(MOST_LEVELS));
                o.insert("spectrum".into(), json!(levels));
            }
        }
        if !args.measure.is_empty() {
            let mut measures = Map::new();
            for m in &args.measure {
                if let Some(v) = measured(row, *m, negativity.get(k)) {
                    measures.insert(m.to_string(), as_value(&v));
                }
            }
            o.insert("measures".into(), Value::Object(measures));
        }
        out.push(Value::Object(o));
    }
    let mut whole = Map::new();
    whole.insert("boundary".into(), json!(network.boundary().len()));
    whole.insert("seed".into(), json!(args.seed));
    whole.insert("regions".into(), Value::Array(out));
    if let Some(averages) = averages {
        let list: Vec<Value> =
            averages.iter().map(|&(l, s)| json!({"length": l, "nats": number(s)})).collect();
        whole.insert("averages".into(), Value::Array(list));
        whole.insert("fit".into(), json!(fitted));
    }
    common.say_json(&whole)
}

fn as_value(m: &Measured) -> Value {
    json!({
        "nats": m.value().map(number),
        "lower_nats": number(m.lower),
        "upper_nats": number(m.upper),
        "evidence": m.evidence,
        "error_nats": number(m.error),
    })
}

/// Measures of several regions together.
pub(super) fn measures(
    network: &Network,
    regions: &[Region],
    found: &[(Measure, Measured)],
    common: &Common,
) -> Result<(), Failure> {
    let names: Vec<String> = regions.iter().map(|r| r.show(network)).collect();
    if common.json {
        let mut map = Map::new();
        for (m, v) in found {
            map.insert(m.to_string(), as_value(v));
        }
        return common.say_json(&json!({
            "boundary": network.boundary().len(),
            "regions": names,
            "measures": map,
        }));
    }
    for (m, v) in found {
        common.say(format_args!("{m} of {}: {}", names.join(" | "), value(v)));
    }
    Ok(())
}
