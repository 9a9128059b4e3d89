//! Tidy tables: one observation a row, units in the names of the columns.

use super::questions::Finding;
use super::result::{CaseResult, StudyResult};
use std::fmt::Write;

/// The table `entropies.csv`.
pub fn entropies(result: &StudyResult) -> String {
    let mut measures: Vec<&str> = Vec::new();
    for row in result.cases.iter().flat_map(|c| &c.regions) {
        for m in row.measures.keys() {
            if !measures.contains(&m.as_str()) {
                measures.push(m);
            }
        }
    }
    let mut out = String::from(
        "case,network,dimension,tensors,boundary_sites,region,kind,name,start_site,region_sites,region_intervals,\
         cut_legs,cut_nats,entropy_nats,entropy_legs,lower_nats,upper_nats,lower_legs,upper_legs,\
         evidence,error_nats,core_tensors,log10_multiply_adds,peak_bytes",
    );
    for m in &measures {
        let _ = write!(out, ",{}_nats", m.replace('-', "_"));
    }
    out.push('\n');
    for c in &result.cases {
        for row in &c.regions {
            let mut cells = head(c);
            cells.extend([
                row.region.clone(),
                row.kind.word().into(),
                row.name.clone().unwrap_or_default(),
                shown(row.start),
                row.sites.to_string(),
                row.intervals.to_string(),
                row.cut_legs.to_string(),
                row.cut_nats.to_string(),
                shown(row.entropy_nats),
                shown(row.entropy_legs),
                row.lower_nats.to_string(),
                row.upper_nats.to_string(),
                shown(row.lower_legs),
                shown(row.upper_legs),
                row.evidence.word().into(),
                row.error_nats.to_string(),
                row.core_tensors.to_string(),
                shown(row.log10_multiply_adds),
                shown(row.peak_bytes),
            ]);
            cells.extend(measures.iter().map(|m| shown(row.measures.get(*m))));
            line(&mut out, &cells);
        }
    }
    out
}

/// The table `by_length.csv`: means over the intervals of each length.
pub fn by_length(result: &StudyResult) -> String {
    let mut out = String::from(
        "case,network,dimension,tensors,boundary_sites,length_sites,intervals,mean_entropy_nats,mean_entropy_legs,\
         least_entropy_nats,largest_entropy_nats,mean_cut_nats\n",
    );
    for c in &result.cases {
        for l in &c.by_length {
            let mut cells = head(c);
            cells.extend([
                l.length.to_string(),
                l.intervals.to_string(),
                l.mean_nats.to_string(),
                shown(l.mean_legs),
                l.least_nats.to_string(),
                l.largest_nats.to_string(),
                l.mean_cut_nats.to_string(),
            ]);
            line(&mut out, &cells);
        }
    }
    out
}

/// The table `erasure.csv`; empty text where no curve was asked for.
pub fn erasure(result: &StudyResult) -> String {
    let mut out = String::new();
    for c in &result.cases {
        for f in &c.findings {
            let Finding::Erasure(e) = f else { continue };
            if out.is_empty() {
                out.push_str(
                    "case,network,dimension,tensors,boundary_sites,bulk_leg,samples,erasure_rate,\
                     greedy_failure,greedy_low_95,greedy_high_95,exact_failure,exact_low_95,exact_high_95\n",
                );
            }
            for p in &e.points {
                let mut cells = head(c);
                cells.extend([
                    e.leg.clone().unwrap_or_else(|| "all".into()),
                    e.samples.to_string(),
                    p.p.to_string(),
                    p.greedy_failure.to_string(),
                    p.greedy_low.to_string(),
                    p.greedy_high.to_string(),
                    shown(p.exact_failure),
                    shown(p.exact_low),
                    shown(p.exact_high),
                ]);
                line(&mut out, &cells);
            }
        }
    }
    out
}

/// The table `orders.csv`; empty text where no orders were asked for.
pub fn orders(result: &StudyResult) -> String {
    let mut out = String::new();
    for c in &result.cases {
        for f in &c.findings {
            let Finding::Order(o) = f else { continue };
            if out.is_empty() {
                out.push_str(
                    "case,network,dimension,tensors,boundary_sites,method,seed,log10_multiply_adds,\
                     log2_peak_elements,log2_largest_tensor_elements,widest_step_labels,widest_step_bound_labels,optimal\n",
                );
            }
            let mut cells = head(c);
            cells.extend([
                o.method.clone(),
                o.seed.to_string(),
                o.log10_multiply_adds.to_string(),
                o.log2_peak_elements.to_string(),
                o.log2_largest_tensor.to_string(),
                o.widest_step.to_string(),
                o.widest_step_bound.to_string(),
                o.optimal.to_string(),
            ]);
            line(&mut out, &cells);
        }
    }
    out
}

fn head(c: &CaseResult) -> Vec<String> {
    vec![
        c.case.clone(),
        c.setting.network.clone(),
        shown(c.setting.dimension),
        c.tensors.to_string(),
        c.boundary.to_string(),
    ]
}

fn shown<T: ToString>(value: Option<T>) -> String {
    value.map_or_else(String::new, |v| v.to_string())
}

fn line(out: &mut String, cells: &[String]) {
    for (i, cell) in cells.iter().enumerate() {
        if i > 0 {
            out.push(',');
        }
        if cell.contains([',', '"', '\n', '\r']) {
            let _ = write!(out, "\"{}\"", cell.replace('"', "\"\""));
        } else {
            out.push_str(cell);
        }
    }
    out.push('\n');
}
