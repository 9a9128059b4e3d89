//! The data that the page carries.

use super::escape;
use crate::network::Network;
use crate::study::answer::Evidence;
use crate::study::layout;
use crate::study::regions::Kind;
use crate::study::result::CaseResult;
use crate::study::row::Row;
use crate::study::run::{CaseOutcome, Outcome};
use crate::study::{Provenance, StudyResult};
use serde_json::{Value, json};
use std::collections::{BTreeMap, HashMap};
use std::fmt::Write;

/// The object as text.
pub fn json(result: &StudyResult, outcome: &Outcome, provenance: &Provenance) -> String {
    let mut graphs: Vec<Value> = Vec::new();
    let mut known: HashMap<String, usize> = HashMap::new();
    let mut cases = Vec::new();
    for (c, r) in outcome.cases.iter().zip(&result.cases) {
        let graph = graph(&c.network);
        let key = graph.to_string();
        let number = *known.entry(key).or_insert_with(|| {
            graphs.push(graph);
            graphs.len() - 1
        });
        cases.push(case(c, r, number));
    }
    json!({
        "name": result.name,
        "about": result.about,
        "seed": result.seed,
        "version": result.version,
        "asked": result.asked,
        "answered": result.answered,
        "run": provenance,
        "graphs": graphs,
        "cases": cases,
    })
    .to_string()
}

/// Which legs each tensor has and where it stands; dimensions are left to the case, so that
/// one graph serves a whole sweep.
fn graph(network: &Network) -> Value {
    let placed = layout::place(network);
    let small = |x: f64| (x * 1e6).round() as i64;
    json!({
        "legs": network.tensor_ids()
            .map(|t| network.legs(t).iter().map(|l| l.index()).collect::<Vec<_>>())
            .collect::<Vec<_>>(),
        "labels": network.labels(),
        "boundary": network.boundary().iter().map(|l| l.index()).collect::<Vec<_>>(),
        "bulk": network.bulk().iter().map(|l| l.index()).collect::<Vec<_>>(),
        "bulkNames": network.bulk().iter().map(|&l| network.label_name(l)).collect::<Vec<_>>(),
        "place": placed.tensors.iter().flat_map(|p| [small(p[0]), small(p[1])]).collect::<Vec<_>>(),
        "angles": placed.angles.iter().map(|&a| small(a)).collect::<Vec<_>>(),
        "tiling": placed.tiling.map(|(p, q)| [p, q]),
    })
}

fn case(c: &CaseOutcome, r: &CaseResult, graph: usize) -> Value {
    let net = &c.network;
    let dims: Vec<usize> =
        (0..net.labels() as u32).map(|l| net.dim(crate::tensor::Label::new(l))).collect();
    let dims = match dims.first() {
        Some(&d) if dims.iter().all(|&x| x == d) => json!(d),
        _ => json!(dims),
    };
    let mut values: Vec<Value> = Vec::new();
    let mut known: HashMap<String, usize> = HashMap::new();
    let mut number = |row: &Row, spectrum: &[(f64, f64)]| {
        let v = value(row, spectrum);
        *known.entry(v.to_string()).or_insert_with(|| {
            values.push(v);
            values.len() - 1
        })
    };
    let mut by_length: BTreeMap<u64, Vec<(u64, usize)>> = BTreeMap::new();
    let mut others = Vec::new();
    for (row, answer) in r.regions.iter().zip(c.answers.iter().flatten()) {
        let v = number(row, &answer.spectrum);
        match row.start {
            Some(start) => by_length.entry(row.sites).or_default().push((start, v)),
            None => others.push(json!([row.region, kind(row.kind), row.name, v])),
        }
    }
    let intervals: Vec<Value> = by_length
        .into_iter()
        .map(|(length, list)| {
            let every = match list.as_slice() {
                [a, b, ..] => b.0 - a.0,
                _ => 1,
            };
            let even = list.iter().enumerate().all(|(i, v)| v.0 == list[0].0 + i as u64 * every);
            let codes = runs(list.iter().map(|v| v.1));
            if even {
                json!([length, list[0].0, every, codes])
            } else {
                json!([length, list.iter().map(|v| v.0).collect::<Vec<_>>(), 0, codes])
            }
        })
        .collect();
    json!({
        "case": r.case,
        "setting": r.setting,
        "graph": graph,
        "dims": dims,
        "legDimension": r.boundary_dimension,
        "tensors": r.tensors,
        "bonds": r.bonds,
        "boundary": r.boundary,
        "bulk": r.bulk,
        "blocks": r.blocks,
        "tables": net.blocks().iter().map(|b| table(b.isometries())).collect::<Vec<_>>(),
        "blockOf": runs(net.tensor_ids().map(|t| net.block_number(t))),
        "counts": r.counts,
        "lengths": r.by_length.iter()
            .map(|l| json!([l.length, l.mean_nats, l.least_nats, l.largest_nats, l.mean_cut_nats]))
            .collect::<Vec<_>>(),
        "fit": r.fit,
        "findings": findings(r),
        "values": values,
        "intervals": intervals,
        "others": others,
    })
}

/// Levels of a spectrum that the page carries.
const LEVELS: usize = 16;

fn value(row: &Row, spectrum: &[(f64, f64)]) -> Value {
    let evidence = Evidence::ALL.iter().position(|&e| e == row.evidence);
    json!([
        row.cut_legs,
        row.cut_nats,
        row.entropy_nats,
        row.lower_nats,
        row.upper_nats,
        evidence,
        row.error_nats,
        row.core_tensors,
        row.log10_multiply_adds.map(|x| (x * 100.0).round() / 100.0),
        row.how,
        (!spectrum.is_empty()).then(|| &spectrum[..spectrum.len().min(LEVELS)]),
    ])
}

/// The findings as in `result.json`, plans left out.
fn findings(r: &CaseResult) -> Value {
    let mut list = json!(r.findings);
    for f in list.as_array_mut().into_iter().flatten() {
        if let Some(object) = f.as_object_mut() {
            object.remove("plan");
        }
    }
    list
}

fn kind(kind: Kind) -> usize {
    match kind {
        Kind::Interval => 0,
        Kind::Named => 1,
        Kind::Union => 2,
        Kind::Subset => 3,
    }
}

/// Equal neighbours together: `[value, times, value, times, …]`.
fn runs(list: impl Iterator<Item = usize>) -> Vec<usize> {
    let mut out: Vec<usize> = Vec::new();
    for v in list {
        let n = out.len();
        if n >= 2 && out[n - 2] == v {
            out[n - 1] += 1;
        } else {
            out.extend([v, 1]);
        }
    }
    out
}

/// From which sets of legs a block is isometric: `"perfect"`, or one bit a subset as
/// hexadecimal digits, four subsets a digit, lowest first; `""` where there is no table.
fn table(isometries: &crate::block::IsometryTable) -> String {
    let legs = isometries.legs();
    if isometries.is_perfect() && isometries.legs() > 1 {
        return "perfect".into();
    }
    if legs > 12 {
        return String::new();
    }
    let subsets = 1u64 << legs;
    (0..subsets)
        .step_by(4)
        .map(|first| {
            let digit = (0..4u64)
                .filter(|k| first + k < subsets && isometries.is_isometry(first + k))
                .fold(0u32, |d, k| d | 1 << k);
            char::from_digit(digit, 16).unwrap_or('0')
        })
        .collect()
}

/// What was asked and what came out, as HTML sentences; cases of which the same is true share
/// one.
pub fn sentences(result: &StudyResult) -> String {
    let mut out = String::new();
    if !result.about.is_empty() {
        let _ = write!(out, "<p>{}</p>", escape(&result.about));
    }
    let mut said: Vec<(String, Vec<&str>)> = Vec::new();
    for c in &result.cases {
        let words = outcome_words(c);
        match said.iter_mut().find(|s| s.0 == words) {
            Some((_, cases)) => cases.push(&c.case),
            None => said.push((words, vec![&c.case])),
        }
    }
    out.push_str("<ul class=\"found\">");
    for (words, cases) in said {
        let _ = write!(out, "<li><b>{}</b>: {words}.</li>", escape(&cases.join(", ")));
    }
    out.push_str("</ul>");
    out
}

fn outcome_words(c: &CaseResult) -> String {
    let words: Vec<String> = c
        .counts
        .kinds
        .iter()
        .map(|(kind, k)| {
            let noun = match kind.as_str() {
                "interval" => "intervals",
                "union" => "random unions",
                "named" => "named regions",
                _ => "subsets",
            };
            let mut s = if k.meet_cut == k.regions {
                format!("all {} {noun} meet the minimal cut", k.regions)
            } else {
                format!("{} of {} {noun} meet the minimal cut", k.meet_cut, k.regions)
            };
            if k.below_cut > 0 {
                let _ = write!(s, ", {} lie below it", k.below_cut);
            }
            if k.open > 0 {
                let _ = write!(s, ", {} are bracketed by bounds", k.open);
            }
            s
        })
        .collect();
    if words.is_empty() { "no region was asked about".into() } else { words.join("; ") }
}
