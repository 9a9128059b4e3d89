//! A sheet of paper: shapes gather in layers and are written in that order.

use super::ink::{self, Ink};
use super::pen::number;
use super::text::escape;
use std::collections::BTreeMap;
use std::fmt::Write;

/// Layers from the bottom up.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Layer {
    Ground,
    Cell,
    Wall,
    Rib,
    Mould,
    Cut,
    Boss,
    Bulk,
    Site,
}

/// What a shape stands for, written as `data-tensor`, `data-bond` or `data-site`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum What {
    Nothing,
    Tensor(usize),
    Label(usize),
    Site(usize),
}

/// Shapes and words on their way to a file.
#[derive(Debug)]
pub(super) struct Sheet {
    /// Shapes of one layer and class that need no address: one path element for all.
    merged: BTreeMap<(Layer, String), String>,
    /// Shapes with an address of their own.
    single: Vec<(Layer, String, What, String)>,
    words: Vec<Word>,
    defs: String,
    ink: Ink,
    id: String,
}

#[derive(Debug)]
struct Word {
    at: [f64; 2],
    anchor: &'static str,
    class: &'static str,
    text: String,
    turn: f64,
}

impl Sheet {
    pub(super) fn new(ink: Ink, id: &str) -> Self {
        Self {
            merged: BTreeMap::new(),
            single: Vec::new(),
            words: Vec::new(),
            defs: ink::patterns(ink, id),
            ink,
            id: id.to_owned(),
        }
    }
    /// A shape; `what` gives it an address of its own.
    pub(super) fn shape(&mut self, layer: Layer, class: &str, what: What, d: String) {
        if d.is_empty() {
            return;
        }
        if what == What::Nothing {
            self.merged.entry((layer, class.to_owned())).or_default().push_str(&d);
        } else {
            self.single.push((layer, class.to_owned(), what, d));
        }
    }
    /// A word; `anchor` is `start`, `middle` or `end`; `at` its base line.
    pub(super) fn word(
        &mut self,
        at: [f64; 2],
        anchor: &'static str,
        class: &'static str,
        text: impl Into<String>,
    ) {
        self.words.push(Word { at, anchor, class, text: text.into(), turn: 0.0 });
    }
    /// A word turned about its anchor, in degrees, clockwise.
    pub(super) fn turned(
        &mut self,
        at: [f64; 2],
        anchor: &'static str,
        class: &'static str,
        text: impl Into<String>,
        turn: f64,
    ) {
        self.words.push(Word { at, anchor, class, text: text.into(), turn });
    }
    /// The whole as an SVG document of `size` units, `width_mm` wide on paper. `style` is the
    /// style sheet, `title` and `desc` are read out by screen readers.
    pub(super) fn write(
        self,
        size: [f64; 2],
        width_mm: f64,
        root: &str,
        style: &str,
        title: &str,
        desc: &str,
    ) -> String {
        let mut out = String::new();
        let (mut w, mut h) = (String::new(), String::new());
        number(&mut w, size[0]);
        number(&mut h, size[1]);
        let height_mm = width_mm * size[1] / size[0];
        let _ = write!(
            out,
            "<svg xmlns=\"http://www.w3.org/2000/svg\" class=\"{root}\" viewBox=\"0 0 {w} {h}\" width=\"{width_mm:.2}mm\" height=\"{height_mm:.2}mm\" role=\"img\" aria-labelledby=\"{id}title {id}desc\">\n<title id=\"{id}title\">{}</title>\n<desc id=\"{id}desc\">{}</desc>\n<style>\n{style}</style>\n<defs>{}</defs>\n",
            escape(title),
            escape(desc),
            self.defs,
            id = self.id,
        );
        if self.ink.has_paper() {
            let _ = writeln!(
                out,
                "<rect width=\"{w}\" height=\"{h}\" fill=\"{}\"/>",
                self.ink.tone("paper")
            );
        }
        let mut layers: Vec<Layer> =
            self.merged.keys().map(|k| k.0).chain(self.single.iter().map(|s| s.0)).collect();
        layers.sort_unstable();
        layers.dedup();
        for layer in layers {
            for ((_, class), d) in self.merged.iter().filter(|m| m.0.0 == layer) {
                let _ = writeln!(out, "<path class=\"{class}\" d=\"{d}\"/>");
            }
            for (_, class, what, d) in self.single.iter().filter(|s| s.0 == layer) {
                let _ = match what {
                    What::Tensor(t) => {
                        writeln!(out, "<path class=\"{class}\" data-tensor=\"{t}\" d=\"{d}\"/>")
                    }
                    What::Label(l) => {
                        writeln!(out, "<path class=\"{class}\" data-label=\"{l}\" d=\"{d}\"/>")
                    }
                    What::Site(s) => {
                        writeln!(out, "<path class=\"{class}\" data-site=\"{s}\" d=\"{d}\"/>")
                    }
                    What::Nothing => writeln!(out, "<path class=\"{class}\" d=\"{d}\"/>"),
                };
            }
        }
        for word in &self.words {
            let (mut x, mut y) = (String::new(), String::new());
            number(&mut x, word.at[0]);
            number(&mut y, word.at[1]);
            let _ = write!(out, "<text x=\"{x}\" y=\"{y}\"");
            if word.anchor != "start" {
                let _ = write!(out, " text-anchor=\"{}\"", word.anchor);
            }
            if !word.class.is_empty() {
                let _ = write!(out, " class=\"{}\"", word.class);
            }
            if word.turn != 0.0 {
                let _ = write!(out, " transform=\"rotate({} {x} {y})\"", word.turn);
            }
            let _ = writeln!(out, ">{}</text>", escape(&word.text));
        }
        out.push_str("</svg>\n");
        out
    }
}
