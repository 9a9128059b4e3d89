//! GraphML: nodes, edges, hyperedges, and a dimension as edge data.
//!
//! Only what makes a graph is read; everything else is passed over. Document types and
//! entities of one's own are refused: nothing is ever expanded.

use super::graph_file::{Fault, GraphFault, too_many, unexpected};
use super::{GraphFile, Hyperedge};
use crate::network::Limits;
use crate::network::intern::Names;

/// A tag: its name without prefix, its attributes, and whether it opens, closes or both.
struct Tag<'a> {
    name: &'a str,
    attributes: Vec<(&'a str, String)>,
    opens: bool,
    closes: bool,
    line: usize,
}

impl Tag<'_> {
    fn get(&self, key: &str) -> Option<&str> {
        self.attributes.iter().find(|(k, _)| *k == key).map(|(_, v)| v.as_str())
    }
    fn needed(&self, key: &'static str) -> Result<&str, Fault> {
        self.get(key).ok_or_else(|| {
            let expected = match key {
                "id" => "a node with an id",
                "source" => "an edge with a source",
                "target" => "an edge with a target",
                _ => "an endpoint with a node",
            };
            unexpected(self.line, self.name, expected)
        })
    }
}

/// Goes through a document tag by tag.
struct Tags<'a> {
    text: &'a str,
    at: usize,
    line: usize,
    open: Vec<&'a str>,
}

/// Tags that may be open at once.
const DEPTH: usize = 64;

impl<'a> Tags<'a> {
    /// Moves on by some bytes and counts their lines.
    fn skip(&mut self, bytes: usize) -> &'a str {
        let part = &self.text[self.at..self.at + bytes];
        self.line += part.bytes().filter(|&b| b == b'\n').count();
        self.at += bytes;
        part
    }
    /// The text before the next tag, and the tag; nothing at the end.
    fn next(&mut self) -> Result<Option<(&'a str, Tag<'a>)>, Fault> {
        loop {
            let rest = &self.text[self.at..];
            let Some(start) = rest.find('<') else {
                if let Some(open) = self.open.last() {
                    return Err(unexpected(self.line, open, "closed before the file ends"));
                }
                return Ok(None);
            };
            let before = self.skip(start);
            let rest = &self.text[self.at..];
            let line = self.line;
            let cut = || unexpected(line, &rest[..rest.len().min(40)], "a whole tag");
            if rest.starts_with("<!--") {
                let end = rest.find("-->").ok_or_else(cut)?;
                self.skip(end + 3);
            } else if rest.starts_with("<![CDATA[") {
                let end = rest.find("]]>").ok_or_else(cut)?;
                self.skip(end + 3);
            } else if rest.starts_with("<?") {
                let end = rest.find("?>").ok_or_else(cut)?;
                self.skip(end + 2);
            } else if rest.starts_with("<!") {
                let found: String = rest.chars().take(20).collect();
                return Err(unexpected(line, &found, "GraphML without document type or entities"));
            } else {
                let end = tag_end(rest).ok_or_else(cut)?;
                let inside = &self.skip(end + 1)[1..end];
                let tag = tag(inside, line)?;
                if tag.opens {
                    if self.open.len() == DEPTH {
                        return Err(unexpected(line, tag.name, "nested less than 64 deep"));
                    }
                    self.open.push(tag.name);
                }
                if tag.closes && self.open.pop() != Some(tag.name) {
                    return Err(unexpected(line, tag.name, "the tag to be closed here"));
                }
                return Ok(Some((before, tag)));
            }
        }
    }
}

/// Where a tag ends: at the first `>` outside quotes.
fn tag_end(text: &str) -> Option<usize> {
    let mut quote = None;
    for (k, b) in text.bytes().enumerate() {
        match (quote, b) {
            (None, b'>') => return Some(k),
            (None, b'"' | b'\'') => quote = Some(b),
            (Some(q), _) if q == b => quote = None,
            _ => {}
        }
    }
    None
}

fn tag(inside: &str, line: usize) -> Result<Tag<'_>, Fault> {
    let fault = || unexpected(line, inside, "a tag");
    let (inside, ends) = match inside.strip_suffix('/') {
        Some(less) => (less, true),
        None => (inside, false),
    };
    let (inside, closing) = match inside.strip_prefix('/') {
        Some(less) => (less, true),
        None => (inside, false),
    };
    let stop = inside.find(char::is_whitespace).unwrap_or(inside.len());
    let full = &inside[..stop];
    let name = full.rsplit(':').next().unwrap_or(full);
    if name.is_empty() {
        return Err(fault());
    }
    let mut attributes = Vec::new();
    let mut rest = inside[stop..].trim_start();
    while !rest.is_empty() {
        let (key, after) = rest.split_once('=').ok_or_else(fault)?;
        let after = after.trim_start();
        let quote = after.chars().next().filter(|c| matches!(c, '"' | '\'')).ok_or_else(fault)?;
        let (value, after) = after[1..].split_once(quote).ok_or_else(fault)?;
        attributes.push((key.trim(), decode(value, line)?));
        rest = after.trim_start();
    }
    Ok(Tag { name, attributes, opens: !closing, closes: closing || ends, line })
}

fn decode(text: &str, line: usize) -> Result<String, Fault> {
    let mut out = String::with_capacity(text.len());
    let mut rest = text;
    while let Some(k) = rest.find('&') {
        out.push_str(&rest[..k]);
        let fault = || unexpected(line, &rest[k..], "a known entity");
        let (entity, after) = rest[k + 1..].split_once(';').ok_or_else(fault)?;
        out.push(match entity {
            "amp" => '&',
            "lt" => '<',
            "gt" => '>',
            "quot" => '"',
            "apos" => '\'',
            other => {
                let number = other.strip_prefix('#').ok_or_else(fault)?;
                let code = match number.strip_prefix(['x', 'X']) {
                    Some(hex) => u32::from_str_radix(hex, 16),
                    None => number.parse(),
                };
                code.ok().and_then(char::from_u32).ok_or_else(fault)?
            }
        });
        rest = after;
    }
    out.push_str(rest);
    Ok(out)
}

pub(super) fn parse(text: &str, limits: &Limits) -> Result<GraphFile, Fault> {
    let mut tags = Tags { text, at: 0, line: 1, open: Vec::new() };
    let mut names = Names::default();
    let mut nodes = 0;
    let mut edges: Vec<(Hyperedge, usize)> = Vec::new();
    let mut dimension_key: Option<String> = None;
    let mut data_key: Option<String> = None;
    let mut graphs = 0;
    let mut edge_open = false;
    while let Some((before, tag)) = tags.next()? {
        let line = tag.line;
        let number = |name: &str, names: &mut Names| {
            let found = names.number(name);
            found.ok_or_else(|| unexpected(line, name, "a name that still fits"))
        };
        match (tag.name, tag.opens) {
            ("graph", true) => {
                graphs += 1;
                if graphs > 1 {
                    return Err(unexpected(line, "graph", "the only graph of the file"));
                }
            }
            ("key", true) => {
                let is_dimension = tag.get("attr.name") == Some("dimension");
                if is_dimension
                    && matches!(tag.get("for"), None | Some("edge" | "hyperedge" | "all"))
                {
                    dimension_key = tag.get("id").map(str::to_owned);
                }
            }
            ("node", true) => {
                let id = tag.needed("id")?;
                let (n, new) = number(id, &mut names)?;
                if !new && n < nodes {
                    return Err(unexpected(line, id, "the id of one node only"));
                }
                // Ids may be used by edges before their node comes.
                if new && n == nodes {
                    nodes += 1;
                } else {
                    return Err(unexpected(line, id, "a node that comes before the edges"));
                }
                too_many("vertices", u64::from(nodes), limits.tensors, line)?;
            }
            ("edge", true) => {
                let a = number(tag.needed("source")?, &mut names)?.0;
                let b = number(tag.needed("target")?, &mut names)?.0;
                edges.push((Hyperedge { ends: vec![a, b], dimension: None }, line));
                edge_open = !tag.closes;
            }
            ("hyperedge", true) => {
                edges.push((Hyperedge { ends: Vec::new(), dimension: None }, line));
                edge_open = !tag.closes;
            }
            ("endpoint", true) => {
                let v = number(tag.needed("node")?, &mut names)?.0;
                match edges.last_mut() {
                    Some((edge, _)) if edge_open => edge.ends.push(v),
                    _ => return Err(unexpected(line, "endpoint", "inside a hyperedge")),
                }
            }
            ("data", true) => data_key = tag.get("key").map(str::to_owned),
            ("data", false) => {
                if edge_open && data_key.is_some() && data_key == dimension_key {
                    let value = before.trim();
                    let d = value
                        .parse::<f64>()
                        .ok()
                        .filter(|d| d.fract() == 0.0 && (1.0..2_147_483_648.0).contains(d));
                    let expected = "a dimension, a whole number from 1 on";
                    let d = d.ok_or_else(|| unexpected(line, value, expected))?;
                    if let Some((edge, _)) = edges.last_mut() {
                        edge.dimension = Some(d as usize);
                    }
                }
                data_key = None;
            }
            ("edge" | "hyperedge", false) => edge_open = false,
            _ => {}
        }
        too_many("edges", edges.len() as u64, limits.legs / 2, line)?;
    }
    for (edge, line) in &edges {
        if let Some(&v) = edge.ends.iter().find(|&&v| v >= nodes) {
            let vertex = names.get(v as usize).to_owned();
            return Err((Some(*line), GraphFault::Vertex { vertex, count: nodes as usize }));
        }
        if edge.ends.len() < 2 {
            return Err(unexpected(*line, "hyperedge", "an edge of two endpoints or more"));
        }
    }
    let names = (0..nodes as usize).map(|n| names.get(n).to_owned()).collect();
    Ok(GraphFile { names, edges: edges.into_iter().map(|(e, _)| e).collect() })
}
