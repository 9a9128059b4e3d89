//! Edge lists: two vertices a line, and a dimension where there is one.

use super::graph_file::{Fault, too_many, unexpected};
use super::{GraphFile, Hyperedge};
use crate::network::Limits;
use crate::network::intern::Names;

pub(super) fn parse(text: &str, limits: &Limits) -> Result<GraphFile, Fault> {
    let mut names = Names::default();
    let mut edges = Vec::new();
    for (k, line) in text.lines().enumerate() {
        let line_number = k + 1;
        let content = line.split(['#', '%']).next().unwrap_or("");
        let words: Vec<&str> =
            content.split([' ', '\t', ',', ';']).filter(|w| !w.is_empty()).take(4).collect();
        let (ends, dimension) = match words[..] {
            [] => continue,
            [a, b] => ([a, b], None),
            [a, b, d] => {
                let dimension = d.parse::<usize>().ok().filter(|&d| (1..1 << 31).contains(&d));
                let expected = "a dimension, a whole number from 1 on";
                ([a, b], Some(dimension.ok_or_else(|| unexpected(line_number, d, expected))?))
            }
            _ => {
                return Err(unexpected(
                    line_number,
                    content.trim(),
                    "an edge, which is two vertices and at most a dimension",
                ));
            }
        };
        let number = |name: &str, names: &mut Names| {
            let found = names.number(name).map(|(n, _)| n);
            found.ok_or_else(|| unexpected(line_number, name, "a name that still fits"))
        };
        let ends = vec![number(ends[0], &mut names)?, number(ends[1], &mut names)?];
        edges.push(Hyperedge { ends, dimension });
        too_many("edges", edges.len() as u64, limits.legs / 2, line_number)?;
        too_many("vertices", names.len() as u64, limits.tensors, line_number)?;
    }
    let names = (0..names.len()).map(|n| names.get(n).to_owned()).collect();
    Ok(GraphFile { names, edges })
}
