//! The figures of a study, each as SVG and, where this build can, as PNG.

use super::picture::{
    Axis, Chart, Look, Marks, Options, PictureError, Point, Scene, Series, Share,
};
use super::result::{CaseResult, StudyResult};
use super::row::Row;
use super::run::CaseOutcome;
use super::{Folder, Outcome, StudyError};
use crate::entropy::closure::Side;
use crate::entropy::{Asker, Node, Request, Wires};
use crate::network::Region;

/// Width in pixels of the PNG twins: one journal column at 600 dots an inch.
#[cfg(feature = "png")]
const PIXELS: u32 = 2008;
/// Tensors beyond which no picture of the network is put into the folder.
const MOST_TENSORS: usize = 50_000;

/// Writes `figures/`: a region with its cut for each network, entropy against length, and
/// the distances below the cut. Returns what could not be drawn, in sentences.
///
/// # Errors
/// [`StudyError::Write`].
pub fn write(
    folder: &Folder,
    outcome: &Outcome,
    result: &StudyResult,
) -> Result<Vec<String>, StudyError> {
    let mut left_out = Vec::new();
    let mut put = |name: &str, svg: Result<String, PictureError>| -> Result<(), StudyError> {
        match svg {
            Ok(svg) => {
                folder.write(&format!("figures/{name}.svg"), svg.as_bytes())?;
                #[cfg(feature = "png")]
                match super::picture::png(&svg, PIXELS) {
                    Ok(bytes) => folder.write(&format!("figures/{name}.png"), &bytes)?,
                    Err(e) => left_out.push(format!("{name}.png: {e}")),
                }
            }
            Err(e) => left_out.push(format!("{name}: {e}")),
        }
        Ok(())
    };
    let mut drawn: Vec<&str> = Vec::new();
    for (number, (c, r)) in outcome.cases.iter().zip(&result.cases).enumerate() {
        // One picture a network: cases that differ by dimension alone share it, drawn for the
        // last of them.
        let twin = result.cases[number + 1..].iter().any(|o| {
            o.setting.network == r.setting.network
                && o.tensors == r.tensors
                && o.boundary == r.boundary
        });
        if twin || c.network.tensors() > MOST_TENSORS || drawn.contains(&r.case.as_str()) {
            continue;
        }
        drawn.push(&r.case);
        let name = match drawn.len() {
            1 => "region".to_owned(),
            k => format!("region-{k}"),
        };
        put(&name, region(c, r))?;
    }
    let lengths: Vec<Series> = result
        .cases
        .iter()
        .filter(|c| c.by_length.len() > 1)
        .map(|c| {
            Series::new(
                c.case.as_str(),
                Look::Line,
                c.by_length
                    .iter()
                    .map(|l| Point::new(l.length as f64, l.mean_legs.unwrap_or(l.mean_nats))),
            )
        })
        .collect();
    let unit =
        if result.cases.iter().all(|c| c.boundary_dimension.is_some()) { "legs" } else { "nats" };
    if !lengths.is_empty() {
        put(
            "entropy-by-length",
            Chart {
                title: "Mean entropy of all intervals of one length".into(),
                x: Axis::linear("length of the interval (sites)"),
                y: Axis::linear(format!("mean entropy ({unit})")),
                series: lengths,
                ..Chart::default()
            }
            .draw(),
        )?;
    }
    let gaps = gaps(result);
    if !gaps.is_empty() {
        put(
            "below-the-cut",
            Chart {
                title: "Regions by distance below the minimal cut".into(),
                x: Axis::linear(format!("minimal cut less entropy ({unit})")),
                y: Axis::linear("regions below the cut"),
                series: gaps,
                ..Chart::default()
            }
            .draw(),
        )?;
    }
    Ok(left_out)
}

/// The region drawn: the one farthest below its cut, else the interval of a third.
fn shown(c: &CaseOutcome, r: &CaseResult) -> Option<Region> {
    let gap = |row: &Row| row.cut_nats - row.upper_nats;
    let farthest = r
        .regions
        .iter()
        .filter(|row| row.below_cut())
        .max_by(|a, b| gap(a).total_cmp(&gap(b)).then(b.region.cmp(&a.region)));
    let n = c.network.boundary().len();
    match farthest {
        Some(row) => Region::parse(&row.region, &c.network).ok(),
        None => (n > 0).then(|| Region::interval(0, (n / 3).max(1), n)),
    }
}

fn region(c: &CaseOutcome, r: &CaseResult) -> Result<String, PictureError> {
    let mut marks = Marks::default();
    let mut title = r.setting.network.clone();
    if let Some(region) = shown(c, r) {
        let wires = Wires::of(&c.network);
        let asker = Asker::new(&wires, Request::default());
        let (closure, cut) = asker.close(&wires.inside(&region));
        marks.shares = vec![Share::Core; c.network.tensors()];
        for (node, owner) in closure.owner.iter().enumerate() {
            if let Node::Tensor(t) = wires.node(node) {
                marks.shares[t.index()] = match owner {
                    Some(Side::Region) => Share::Region,
                    Some(Side::Complement) => Share::Rest,
                    None => Share::Core,
                };
            }
        }
        marks.cut = cut.far;
        title = format!("{title}: region {}", region.show(&c.network));
        marks.region = Some(region);
    }
    let options = Options { title: Some(title), ..Options::default() };
    Ok(Scene { network: &c.network, marks, options }.draw()?.svg)
}

/// Counts of regions by distance below the cut, one series a case; none where all meet it.
fn gaps(result: &StudyResult) -> Vec<Series> {
    result
        .cases
        .iter()
        .filter_map(|c| {
            let unit = c.boundary_dimension.map_or(1.0, |d| (d as f64).ln());
            let mut counts: Vec<(f64, f64)> = Vec::new();
            let mut gaps: Vec<f64> = c
                .regions
                .iter()
                .filter(|r| r.below_cut())
                .filter_map(|r| Some((r.cut_nats - r.entropy_nats?) / unit))
                .collect();
            gaps.sort_by(f64::total_cmp);
            for g in gaps {
                match counts.last_mut() {
                    Some(last) if (last.0 - g).abs() < 1e-9 => last.1 += 1.0,
                    _ => counts.push((g, 1.0)),
                }
            }
            (!counts.is_empty()).then(|| {
                let points = counts.into_iter().map(|(g, k)| Point::new(g, k));
                Series::new(c.case.as_str(), Look::Marks, points)
            })
        })
        .collect()
}
