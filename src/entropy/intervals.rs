//! All intervals of a boundary at once.

use super::answer::EntropyError;
use super::closure::{Front, Side, Step};
use super::cut::Cutter;
use super::planar::Planar;
use super::stabilizer::{self, Clipped};
use super::wires::Wires;
use crate::network::Region;
use crate::watch::{News, Watch};
use rayon::prelude::*;

/// For the intervals [start, start + l), l = 0..=sites: whether closure absorbs the whole
/// network from both sides, the interval's first. Such an interval's entropy is its minimal
/// cut.
///
/// As the interval grows the region's front only advances: one pass says at which length each
/// node is absorbed. As it then shrinks again, the complement learns legs and gains the nodes
/// that the region no longer absorbs; its front only advances too. Two passes over the
/// network for all lengths together.
///
/// # Panics
/// Where `start` is no boundary site.
#[track_caller]
pub fn closed_from(wires: &Wires<'_>, start: usize) -> Vec<bool> {
    let sites = wires.network().boundary().len();
    assert!(start < sites, "site {start} of {sites}");
    let nodes = wires.nodes();
    let mut owner = vec![None; nodes];
    let mut steps: Vec<Step> = Vec::with_capacity(nodes);
    // The nodes that the region absorbs at length l are steps[ends[l]..ends[l + 1]].
    let mut ends = Vec::with_capacity(sites + 2);
    let mut region = Front::new(wires, Side::Region);
    ends.push(0);
    region.run(&mut owner, &mut steps, &|_| true);
    ends.push(steps.len());
    for l in 1..=sites {
        region.learn_open((start + l - 1) % sites);
        region.run(&mut owner, &mut steps, &|_| true);
        ends.push(steps.len());
    }
    let mut complement = Front::new(wires, Side::Complement);
    for bulk in sites..wires.open() {
        complement.learn_open(bulk);
    }
    let mut taken = vec![true; nodes];
    for (n, o) in owner.iter().enumerate() {
        taken[n] = o.is_some();
    }
    let mut of_complement = vec![None; nodes];
    let mut absorbed: Vec<Step> = Vec::with_capacity(nodes);
    let mut closed = vec![false; sites + 1];
    for l in (0..=sites).rev() {
        if l < sites {
            for &(_, n) in &steps[ends[l + 1]..ends[l + 2]] {
                taken[n as usize] = false;
                complement.wake_node(n);
            }
            complement.learn_open((start + l) % sites);
        }
        complement.run(&mut of_complement, &mut absorbed, &|n| !taken[n]);
        closed[l] = ends[l + 1] + absorbed.len() == nodes;
    }
    closed
}

/// Minimal cuts and exact entropies of all intervals, as far as they follow without looking
/// at intervals one by one.
#[derive(Debug, Clone)]
pub struct Intervals {
    sites: usize,
    cuts: Cuts,
    /// ln p and the digits of every [a, b), for each prime.
    exact: Option<Vec<(f64, Vec<u32>)>>,
}

#[derive(Debug, Clone)]
enum Cuts {
    Planar(Planar),
    Flow,
}

impl Intervals {
    /// Prepares: dual of a planar patch; for stabilizer networks without bulk legs, the state
    /// in clipped form.
    ///
    /// # Errors
    /// [`EntropyError`]: the network is zero or a stop was asked for.
    pub fn of(
        wires: &Wires<'_>,
        finite_field: bool,
        watch: &dyn Watch,
    ) -> Result<Self, EntropyError> {
        let sites = wires.network().boundary().len();
        let cuts = Planar::of(wires).map_or(Cuts::Flow, Cuts::Planar);
        let exact =
            if finite_field && wires.network().bulk().is_empty() && stabilizer::has_states(wires) {
                watch.tell(News::Stage("finite field"));
                let states = stabilizer::states(wires, watch)?;
                Some(
                    states
                        .iter()
                        .map(|s| (f64::from(s.prime()).ln(), Clipped::of(s).all(sites)))
                        .collect(),
                )
            } else {
                None
            };
        Ok(Self { sites, cuts, exact })
    }
    /// Number of boundary sites.
    pub fn sites(&self) -> usize {
        self.sites
    }
    /// Whether the dual of a planar patch gives the cuts.
    pub fn is_planar(&self) -> bool {
        matches!(self.cuts, Cuts::Planar(_))
    }
    /// Minimal cuts, in nats, of [start, start + l), l = 0..=sites.
    pub fn cuts_from(&self, wires: &Wires<'_>, start: usize) -> Vec<f64> {
        match &self.cuts {
            Cuts::Planar(planar) => planar.cuts_from(start),
            Cuts::Flow => {
                let cutter = Cutter::new(wires);
                (0..=self.sites)
                    .map(|l| {
                        let region = Region::interval(start, l, self.sites);
                        cutter.cut(&wires.inside(&region)).nats
                    })
                    .collect()
            }
        }
    }
    /// Entropy of [start, start + length) in nats, where the network is a stabilizer state
    /// without bulk legs. In a pure state an interval that wraps is as entangled as the one
    /// that it leaves.
    pub fn exact(&self, start: usize, length: usize) -> Option<f64> {
        let tables = self.exact.as_ref()?;
        let n = self.sites;
        let (a, b) = (start, start + length.min(n));
        let (a, b) = if b <= n { (a, b) } else { (b - n, a) };
        let total = tables.iter().map(|(ln, t)| f64::from(t[a * (n + 1) + b]) * ln).sum();
        Some(total)
    }
    /// Average of the minimal cut over all positions, for every length: entry l. Starts run in
    /// parallel.
    pub fn average_cuts(&self, wires: &Wires<'_>) -> Vec<f64> {
        let rows: Vec<Vec<f64>> =
            (0..self.sites).into_par_iter().map(|s| self.cuts_from(wires, s)).collect();
        average(&rows, self.sites)
    }
    /// Average of the exact entropy over all positions, for every length: entry l.
    pub fn average_exact(&self) -> Option<Vec<f64>> {
        self.exact.as_ref()?;
        let n = self.sites;
        let mean = |l: usize| -> f64 {
            (0..n).filter_map(|s| self.exact(s, l)).sum::<f64>() / n.max(1) as f64
        };
        Some((0..=n).map(mean).collect())
    }
}

fn average(rows: &[Vec<f64>], sites: usize) -> Vec<f64> {
    (0..=sites).map(|l| rows.iter().map(|r| r[l]).sum::<f64>() / rows.len().max(1) as f64).collect()
}
