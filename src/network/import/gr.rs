//! The `.gr` format of the treewidth challenge: `p tw n m`, then one edge a line.

use super::graph_file::{Fault, GraphFault, too_many, unexpected};
use super::{GraphFile, Hyperedge};
use crate::network::Limits;

pub(super) fn parse(text: &str, limits: &Limits) -> Result<GraphFile, Fault> {
    let mut size: Option<(u32, u64)> = None;
    let mut edges = Vec::new();
    for (k, line) in text.lines().enumerate() {
        let line_number = k + 1;
        let words: Vec<&str> = line.split_ascii_whitespace().take(5).collect();
        match words[..] {
            [] | ["c", ..] => {}
            ["p", _, n, m] => {
                let fault = || unexpected(line_number, line, "a line `p tw` vertices edges");
                let (n, m) = n.parse().ok().zip(m.parse().ok()).ok_or_else(fault)?;
                if size.is_some() {
                    return Err(unexpected(
                        line_number,
                        line,
                        "an edge: there is a `p` line already",
                    ));
                }
                too_many("vertices", u64::from(n), limits.tensors, line_number)?;
                too_many("edges", m, limits.legs / 2, line_number)?;
                size = Some((n, m));
            }
            [a, b] => {
                let Some((n, _)) = size else {
                    return Err(unexpected(line_number, line, "a line `p tw` vertices edges"));
                };
                let number = |w: &str| -> Result<u32, Fault> {
                    let fault = || unexpected(line_number, w, "the number of a vertex");
                    let v: u32 = w.parse().map_err(|_| fault())?;
                    if (1..=n).contains(&v) {
                        return Ok(v - 1);
                    }
                    let vertex = w.to_owned();
                    Err((Some(line_number), GraphFault::Vertex { vertex, count: n as usize }))
                };
                let ends = vec![number(a)?, number(b)?];
                edges.push(Hyperedge { ends, dimension: None });
                too_many("edges", edges.len() as u64, limits.legs / 2, line_number)?;
            }
            _ => return Err(unexpected(line_number, line, "an edge, which is two vertices")),
        }
    }
    let Some((n, announced)) = size else {
        return Err(unexpected(1, text.lines().next().unwrap_or(""), "a graph with a `p` line"));
    };
    let found = edges.len() as u64;
    if found != announced {
        return Err((None, GraphFault::Count { what: "edges", announced, found }));
    }
    Ok(GraphFile { names: (0..n).map(|v| v.to_string()).collect(), edges })
}
