//! The canvas of one drawing: frame, title, legend, and what both kinds of drawing share.

use super::ink::{self, TEXT};
use super::marks::{Address, Reach, Share};
use super::pen::Path;
use super::scene::{Drawn, Picture, Scene, SitePlace};
use super::sheet::{Layer, Sheet, What};
use super::text;
use crate::network::TensorId;
use std::collections::BTreeMap;

/// Width of every drawing in its own units; a tenth of a millimetre each at one column.
pub(super) const WIDTH: f64 = 850.0;

/// Smallest on-paper size (units, centre to side) at which a tile is drawn at all.
pub(super) const SEEN: f64 = 0.6;

/// Level of detail of something this large: 0 for hairlines, 6 for the full form.
pub(super) fn level(size: f64) -> usize {
    ((size / SEEN).log2().floor().max(0.0) as usize).min(6)
}

#[derive(Debug)]
pub(super) struct Canvas {
    pub(super) sheet: Sheet,
    pub(super) sites: Vec<SitePlace>,
    pub(super) tensors: Vec<Option<[f64; 2]>>,
    pub(super) disk: Option<([f64; 2], f64)>,
    pub(super) drawn: Drawn,
    /// Numbers of bonds that join two patches, by label.
    pub(super) seams: BTreeMap<usize, usize>,
    /// First line below the title.
    pub(super) top: f64,
    /// Where the drawing proper ends; the legend begins there.
    pub(super) bottom: f64,
    variants: Vec<usize>,
    bulk_legs: Vec<bool>,
}

impl Canvas {
    pub(super) fn new(scene: &Scene<'_>) -> Self {
        let mut sheet = Sheet::new(scene.options.ink, &scene.options.id);
        let mut top = 8.0;
        if let Some(title) = &scene.options.title {
            sheet.word([8.0, 24.0], "start", "", text::fit(title, TEXT, WIDTH - 16.0));
            top = 36.0;
        }
        let mut bulk_legs = vec![false; scene.network.labels()];
        for l in scene.network.bulk() {
            bulk_legs[l.index()] = true;
        }
        Self {
            sheet,
            sites: Vec::new(),
            tensors: vec![None; scene.network.tensors()],
            disk: None,
            drawn: Drawn::default(),
            seams: BTreeMap::new(),
            top,
            bottom: top,
            variants: variants(scene),
            bulk_legs,
        }
    }
    /// The address of a tensor, where shapes have addresses.
    pub(super) fn tensor(scene: &Scene<'_>, t: usize) -> What {
        if scene.options.address == Address::All { What::Tensor(t) } else { What::Nothing }
    }
    pub(super) fn label(scene: &Scene<'_>, l: usize) -> What {
        if scene.options.address == Address::All { What::Label(l) } else { What::Nothing }
    }
    pub(super) fn site(scene: &Scene<'_>, s: usize) -> What {
        if scene.options.address == Address::None { What::Nothing } else { What::Site(s) }
    }
    /// A rib: its dark body, and its light core where it is near.
    pub(super) fn rib(&mut self, level: usize, d: String) {
        if ink::MOULD[level] > 0.0 {
            self.sheet.shape(Layer::Mould, &format!("mould k{level}"), What::Nothing, d.clone());
        }
        self.sheet.shape(Layer::Rib, &format!("rib k{level}"), What::Nothing, d);
    }
    /// A piece of the cut's curve.
    pub(super) fn cut(&mut self, level: usize, what: What, d: String) {
        self.sheet.shape(Layer::Cut, &format!("casing k{level}"), What::Nothing, d.clone());
        self.sheet.shape(Layer::Cut, &format!("cut k{level}"), what, d);
    }
    /// A boss: a star whose points look along the legs (`looks`, unit vectors on paper).
    pub(super) fn boss(
        &mut self,
        scene: &Scene<'_>,
        t: usize,
        at: [f64; 2],
        reach: f64,
        looks: &[[f64; 2]],
    ) {
        let mut path = Path::new();
        star(&mut path, at, reach, looks);
        let variant = self.variants[scene.network.block_number(TensorId::new(t as u32))];
        let mut class = match variant {
            0 => "boss".to_owned(),
            v => format!("boss v{}", 1 + (v - 1) % 3),
        };
        if reach < 3.0 {
            class.push_str(" far");
        }
        self.sheet.shape(Layer::Boss, &class, Self::tensor(scene, t), path.into_text());
        self.drawn.tensors += 1;
    }
    /// The bulk legs of a tensor: rings on its boss, side by side; filled and haloed where
    /// somebody can recover them, struck through where nobody can.
    pub(super) fn bulk(&mut self, scene: &Scene<'_>, t: usize, at: [f64; 2], reach: f64) {
        let legs: Vec<_> = scene
            .network
            .legs(TensorId::new(t as u32))
            .iter()
            .copied()
            .filter(|l| self.bulk_legs[l.index()])
            .collect();
        let r = reach * if legs.len() > 1 { 0.3 } else { 0.42 };
        for (k, &l) in legs.iter().enumerate() {
            let shift = (k as f64 - (legs.len() - 1) as f64 / 2.0) * 2.4 * r;
            let c = [at[0] + shift, at[1]];
            let ring = |r: f64| {
                let mut p = Path::new();
                p.circle(c, r);
                p.into_text()
            };
            let what = Self::label(scene, l.index());
            let told = scene.marks.bulk.iter().find(|b| b.0 == l).map(|b| b.1);
            let class = match told {
                None => "bulk",
                Some(Reach::Region) => {
                    self.sheet.shape(Layer::Bulk, "halo a", What::Nothing, ring(r * 2.1));
                    "bulk a"
                }
                Some(Reach::Rest) => {
                    self.sheet.shape(Layer::Bulk, "halo b", What::Nothing, ring(r * 2.1));
                    "bulk b"
                }
                Some(Reach::Nobody) => "bulk lost",
            };
            self.sheet.shape(Layer::Bulk, class, what, ring(r));
            if told == Some(Reach::Nobody) {
                let (mut p, s) = (Path::new(), r * 0.7);
                p.move_to([c[0] - s, c[1] - s]);
                p.line_to([c[0] + s, c[1] + s]);
                p.move_to([c[0] - s, c[1] + s]);
                p.line_to([c[0] + s, c[1] - s]);
                self.sheet.shape(Layer::Bulk, "strike", What::Nothing, p.into_text());
            }
        }
    }
    /// Writes legend and frame.
    pub(super) fn finish(mut self, scene: &Scene<'_>) -> Picture {
        if scene.options.legend {
            self.legend(scene);
        }
        let size = [WIDTH, self.bottom + 8.0];
        let network = scene.network;
        let named = if network.name().is_empty() { "network" } else { network.name() };
        let title = scene.options.title.clone().unwrap_or_else(|| named.to_owned());
        let mut desc = format!(
            "{named}: {} tensors, {} bonds, {} boundary legs, {} bulk legs.",
            network.tensors(),
            network.bonds(),
            network.boundary().len(),
            network.bulk().len(),
        );
        if self.drawn.visible_tensors < network.tensors() {
            desc.push_str(&format!(
                " {} tensors are large enough to be seen and drawn.",
                self.drawn.visible_tensors
            ));
        }
        if let Some(r) = &scene.marks.region {
            desc.push_str(&format!(" Region of {} sites.", r.sites()));
        }
        if !scene.marks.cut.is_empty() {
            desc.push_str(&format!(" The cut crosses {} legs.", scene.marks.cut.len()));
        }
        let root = format!("{}net", scene.options.id);
        let style = ink::style(scene.options.ink, &root, &scene.options.id);
        Picture {
            svg: self.sheet.write(size, scene.options.width_mm, &root, &style, &title, &desc),
            size,
            sites: self.sites,
            tensors: self.tensors,
            disk: self.disk,
            drawn: self.drawn,
        }
    }
    fn legend(&mut self, scene: &Scene<'_>) {
        let marks = &scene.marks;
        let mut entries: Vec<(Sign, &str)> = Vec::new();
        if marks.region.as_ref().is_some_and(|r| r.sites() > 0) {
            entries.push((Sign::Shape(Layer::Site, "site region"), "region A"));
        }
        if !marks.cut.is_empty() {
            entries.push((Sign::Cut, "minimal cut"));
        }
        let has = |s: Share| marks.shares.contains(&s);
        if has(Share::Region) {
            entries.push((Sign::Shape(Layer::Cell, "cell a"), "absorbed from A"));
        }
        if has(Share::Rest) {
            entries.push((Sign::Shape(Layer::Cell, "cell b"), "absorbed from the rest"));
        }
        if has(Share::Core) {
            entries.push((Sign::Shape(Layer::Cell, "disk"), "core"));
        }
        for (reach, word) in [
            (Reach::Region, "recoverable from A"),
            (Reach::Rest, "recoverable from the rest"),
            (Reach::Nobody, "recoverable by neither"),
        ] {
            if marks.bulk.iter().any(|b| b.1 == reach) {
                entries.push((Sign::Bulk(reach), word));
            }
        }
        let (mut x, mut y) = (12.0, self.bottom + 20.0);
        let any = !entries.is_empty();
        for (sign, word) in entries {
            let needs = 44.0 + text::width(word, TEXT) + 26.0;
            if x + needs > WIDTH && x > 12.0 {
                x = 12.0;
                y += 30.0;
            }
            self.sign(sign, [x, y]);
            self.sheet.word([x + 44.0, y + 7.5], "start", "", word);
            x += needs;
        }
        if any {
            self.bottom = y + 16.0;
        }
    }
    fn sign(&mut self, sign: Sign, at: [f64; 2]) {
        let [x, y] = at;
        let mut p = Path::new();
        match sign {
            Sign::Shape(layer, class) => {
                p.move_to([x, y - 10.0]);
                p.line_to([x + 34.0, y - 10.0]);
                p.line_to([x + 34.0, y + 10.0]);
                p.line_to([x, y + 10.0]);
                p.close();
                self.sheet.shape(layer, class, What::Nothing, p.into_text());
            }
            Sign::Cut => {
                p.move_to([x + 2.0, y + 5.0]);
                p.bend_to([x + 17.0, y - 15.0], [x + 32.0, y + 5.0]);
                self.sheet.shape(Layer::Cut, "cut k5", What::Nothing, p.into_text());
            }
            Sign::Bulk(reach) => {
                let c = [x + 17.0, y];
                let (halo, class) = match reach {
                    Reach::Region => ("halo a", "bulk a"),
                    Reach::Rest => ("halo b", "bulk b"),
                    Reach::Nobody => ("", "bulk lost"),
                };
                let ring = |r: f64| {
                    let mut p = Path::new();
                    p.circle(c, r);
                    p.into_text()
                };
                if !halo.is_empty() {
                    self.sheet.shape(Layer::Bulk, halo, What::Nothing, ring(14.0));
                }
                self.sheet.shape(Layer::Bulk, class, What::Nothing, ring(7.0));
                if reach == Reach::Nobody {
                    p.move_to([c[0] - 5.0, c[1] - 5.0]);
                    p.line_to([c[0] + 5.0, c[1] + 5.0]);
                    p.move_to([c[0] - 5.0, c[1] + 5.0]);
                    p.line_to([c[0] + 5.0, c[1] - 5.0]);
                    self.sheet.shape(Layer::Bulk, "strike", What::Nothing, p.into_text());
                }
            }
        }
    }
}

enum Sign {
    Shape(Layer, &'static str),
    Cut,
    Bulk(Reach),
}

/// Which look each block gets, by its name: the commonest the first, ties in the order of
/// blocks.
fn variants(scene: &Scene<'_>) -> Vec<usize> {
    let network = scene.network;
    let mut kind: Vec<usize> = Vec::new();
    let mut names: BTreeMap<&str, usize> = BTreeMap::new();
    for block in network.blocks() {
        let next = names.len();
        kind.push(*names.entry(block.name()).or_insert(next));
    }
    let mut uses = vec![0usize; names.len()];
    for t in network.tensor_ids() {
        uses[kind[network.block_number(t)]] += 1;
    }
    let mut order: Vec<usize> = (0..uses.len()).collect();
    order.sort_by_key(|&k| std::cmp::Reverse(uses[k]));
    let mut rank = vec![0; uses.len()];
    for (place, k) in order.into_iter().enumerate() {
        rank[k] = place;
    }
    kind.into_iter().map(|k| rank[k]).collect()
}

/// A star with a point along each of `looks` and waists between; a lozenge for fewer than
/// three.
fn star(path: &mut Path, at: [f64; 2], reach: f64, looks: &[[f64; 2]]) {
    let mut angles: Vec<f64> = looks.iter().map(|v| v[1].atan2(v[0])).collect();
    angles.sort_by(f64::total_cmp);
    angles.dedup_by(|a, b| (*a - *b).abs() < 0.15);
    let tau = std::f64::consts::TAU;
    let point = |angle: f64, r: f64| [at[0] + r * angle.cos(), at[1] + r * angle.sin()];
    if angles.len() < 3 {
        let axis = angles.first().copied().unwrap_or(0.0);
        path.move_to(point(axis, reach));
        for k in 1..4 {
            let r = if k % 2 == 1 { reach * 0.62 } else { reach };
            path.line_to(point(axis + tau / 4.0 * f64::from(k), r));
        }
        path.close();
        return;
    }
    let n = angles.len();
    path.move_to(point(angles[0], reach));
    for k in 0..n {
        let (mut a, b) = (angles[k], if k + 1 < n { angles[k + 1] } else { angles[0] + tau });
        if b - a > 2.4 {
            // A short point where no leg leaves keeps the star round its middle.
            let m = f64::midpoint(a, b);
            path.bend_to(point(f64::midpoint(a, m), reach * 0.36), point(m, reach * 0.6));
            a = m;
        }
        let waist = reach * (0.34 + 0.16 * (1.0 - ((b - a) / 2.0).cos().abs()));
        path.bend_to(point(f64::midpoint(a, b), waist * 0.75), point(b, reach));
    }
    path.close();
}
