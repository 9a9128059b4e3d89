//! The page of a comparison: for each network a table and three charts.

use super::compare::Row;
use crate::cli::Failure;
use crate::study::picture::{Axis, Chart, Ink, Look, Point, Series, theme_css};
use std::fmt::Write;

/// The whole page, self-contained.
pub(super) fn write(rows: &[Row]) -> Result<String, Failure> {
    let mut networks: Vec<&str> = Vec::new();
    let mut methods: Vec<&str> = Vec::new();
    for r in rows {
        if !networks.contains(&r.network.as_str()) {
            networks.push(&r.network);
        }
        if !methods.contains(&r.method) {
            methods.push(r.method);
        }
    }
    let mut body = overview(rows, &networks, &methods);
    for (i, name) in networks.iter().enumerate() {
        let own: Vec<&Row> = rows.iter().filter(|r| r.network == *name).collect();
        let first = own[0];
        let _ = write!(
            body,
            "<section><h2>{}</h2><p>{} tensors, {} labels. No order has a widest step of fewer than {} labels.</p><div class=\"charts\">",
            escape(name),
            first.tensors,
            first.labels,
            own.iter().map(|r| r.bound).max().unwrap_or(0)
        );
        let charts = [
            ("Cost against time spent: mean, least and most over seeds", over_time(&own, &methods)),
            ("Spread over seeds at the largest budget", spread(&own, &methods)),
            ("Multiply-adds against memory", frontier(&own)),
        ];
        for (k, (caption, mut chart)) in charts.into_iter().enumerate() {
            if chart.series.iter().all(|s| s.points.is_empty()) {
                continue;
            }
            chart.id = format!("c{i}x{k}");
            chart.title = format!("{caption}, {name}");
            let drawing = chart.draw()?;
            let _ = write!(
                body,
                "<figure>{drawing}<figcaption>{}</figcaption></figure>",
                escape(caption)
            );
        }
        body.push_str("</div></section>");
    }
    Ok(format!(
        "<!doctype html><html lang=\"en\"><head><meta charset=\"utf-8\"><meta name=\"viewport\" content=\"width=device-width\"><title>Contraction orders compared</title><style>{}{STYLE}</style></head><body><h1>Contraction orders compared</h1>{body}</body></html>\n",
        theme_css()
    ))
}

const STYLE: &str = "body{background:var(--lierne-paper);color:var(--lierne-ink);font:16px/1.45 'DejaVu Sans',Verdana,sans-serif;max-width:72rem;margin:2rem auto;padding:0 1rem}table{border-collapse:collapse;display:block;overflow-x:auto}td,th{padding:.25rem .7rem;border-bottom:1px solid var(--lierne-faint);text-align:right;font-variant-numeric:tabular-nums}td:first-child,th:first-child{text-align:left}.charts{display:flex;flex-wrap:wrap;gap:1rem}figure{margin:0;flex:1 1 24rem;min-width:0}figure svg{width:100%;height:auto}figcaption{color:var(--lierne-soft);font-size:.85rem}td.best{font-weight:bold}";

/// Rows of a method on a network without a memory limit, at the largest budget.
fn at_full<'a>(rows: &'a [&Row], method: &str) -> Vec<&'a Row> {
    let most = rows.iter().map(|r| r.given).fold(0.0, f64::max);
    rows.iter()
        .copied()
        .filter(|r| r.method == method && r.memory.is_none() && r.given == most)
        .collect()
}

fn median(mut values: Vec<f64>) -> Option<f64> {
    values.sort_by(f64::total_cmp);
    let n = values.len();
    (n > 0).then(|| (values[(n - 1) / 2] + values[n / 2]) / 2.0)
}

fn overview(rows: &[Row], networks: &[&str], methods: &[&str]) -> String {
    let mut text = String::from(
        "<p>log10 of the multiply-adds, median over seeds at the largest budget; the best of each network in bold. Every run is in orders.csv.</p><table><tr><th>network</th><th>tensors</th>",
    );
    for m in methods {
        let _ = write!(text, "<th>{m}</th>");
    }
    text.push_str("</tr>");
    for name in networks {
        let own: Vec<&Row> = rows.iter().filter(|r| r.network == *name).collect();
        let medians: Vec<Option<f64>> = methods
            .iter()
            .map(|m| median(at_full(&own, m).iter().map(|r| r.cost.log10_multiply_adds).collect()))
            .collect();
        let best = medians.iter().flatten().copied().fold(f64::INFINITY, f64::min);
        let _ = write!(text, "<tr><td>{}</td><td>{}</td>", escape(name), own[0].tensors);
        for m in medians {
            let _ = match m {
                Some(x) if x <= best + 5e-4 => write!(text, "<td class=\"best\">{x:.3}</td>"),
                Some(x) => write!(text, "<td>{x:.3}</td>"),
                None => write!(text, "<td>–</td>"),
            };
        }
        text.push_str("</tr>");
    }
    text.push_str("</table>");
    text
}

const COST: &str = "log10 multiply-adds";

fn chart(x: Axis, series: Vec<Series>) -> Chart {
    Chart { x, y: Axis::linear(COST), series, ink: Ink::Page, ..Chart::default() }
}

fn over_time(rows: &[&Row], methods: &[&str]) -> Chart {
    let series = methods.iter().map(|m| {
        let own: Vec<&&Row> =
            rows.iter().filter(|r| r.method == *m && r.memory.is_none()).collect();
        let mut budgets: Vec<f64> = own.iter().map(|r| r.given).collect();
        budgets.sort_by(f64::total_cmp);
        budgets.dedup();
        let points = budgets.into_iter().filter_map(|b| {
            let at: Vec<&&&Row> = own.iter().filter(|r| r.given == b).collect();
            let costs: Vec<f64> =
                at.iter().map(|r| r.cost.log10_multiply_adds).filter(|c| c.is_finite()).collect();
            if costs.is_empty() {
                return None;
            }
            let mean = |v: &[f64]| v.iter().sum::<f64>() / v.len() as f64;
            let spent = mean(&at.iter().map(|r| r.spent).collect::<Vec<_>>());
            let low = costs.iter().copied().fold(f64::INFINITY, f64::min);
            let high = costs.iter().copied().fold(f64::NEG_INFINITY, f64::max);
            Some(Point::between(spent.max(1e-4), mean(&costs), low, high))
        });
        Series::new(*m, Look::Line, points)
    });
    chart(Axis::log("seconds spent"), series.collect())
}

fn spread(rows: &[&Row], methods: &[&str]) -> Chart {
    let points = methods.iter().enumerate().flat_map(|(i, m)| {
        at_full(rows, m)
            .into_iter()
            .map(move |r| Point::new(i as f64, r.cost.log10_multiply_adds))
            .filter(|p| p.y.is_finite())
            .collect::<Vec<_>>()
    });
    let mut x = Axis::linear("method").between(-0.5, methods.len() as f64 - 0.5);
    // Short words, so that seven of them stand side by side.
    x.words =
        methods.iter().enumerate().map(|(i, m)| (i as f64, m.chars().take(6).collect())).collect();
    chart(x, vec![Series::new("", Look::Marks, points)])
}

fn frontier(rows: &[&Row]) -> Chart {
    let mut points: Vec<Point> = rows
        .iter()
        .filter(|r| r.memory.is_some())
        .map(|r| Point::new(r.cost.log2_peak_elements, r.cost.log10_multiply_adds))
        .collect();
    let free = at_full(rows, "portfolio")
        .into_iter()
        .min_by(|a, b| a.cost.log10_multiply_adds.total_cmp(&b.cost.log10_multiply_adds));
    if !points.is_empty() {
        points.extend(
            free.map(|r| Point::new(r.cost.log2_peak_elements, r.cost.log10_multiply_adds)),
        );
    }
    points.retain(|p| p.y.is_finite());
    points.sort_by(|a, b| a.x.total_cmp(&b.x));
    chart(Axis::linear("log2 peak elements"), vec![Series::new("", Look::Line, points)])
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}
