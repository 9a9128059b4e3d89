//! `report.html`: one self-contained page to explore a study's result in.
//!
//! The page holds its style, its program and its data; it asks the network for nothing. The
//! data are compact (`data`): the graph once for all cases that share it, and for all
//! intervals one number each into a table of distinct answers, so that ten thousand boundary
//! sites stay small. Cuts and closures of a chosen region are found by the page itself.

mod data;

use super::{Outcome, Provenance, StudyResult};

const FRAME: &str = include_str!("page.html");
const STYLE: &str = include_str!("page.css");
const PROGRAM: [&str; 7] = [
    include_str!("js/data.js"),
    include_str!("js/network.js"),
    include_str!("js/disk.js"),
    include_str!("js/charts.js"),
    include_str!("js/tables.js"),
    include_str!("js/findings.js"),
    include_str!("js/page.js"),
];

/// The page.
pub fn page(result: &StudyResult, outcome: &Outcome, provenance: &Provenance) -> String {
    let data = data::json(result, outcome, provenance)
        // Nothing in the data may end the element that holds it.
        .replace("</", "<\\/")
        .replace("<!--", "<\\u0021--");
    let program = PROGRAM.concat();
    let mut out = String::with_capacity(FRAME.len() + STYLE.len() + program.len() + data.len());
    let mut rest = FRAME;
    for (mark, text) in [
        ("{{title}}", escape(&result.name)),
        ("{{style}}", STYLE.to_owned()),
        ("{{summary}}", data::sentences(result)),
        ("{{data}}", data),
        ("{{program}}", program),
    ] {
        if let Some((before, after)) = rest.split_once(mark) {
            out.push_str(before);
            out.push_str(&text);
            rest = after;
        }
    }
    out.push_str(rest);
    out
}

/// Text for HTML.
fn escape(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}
