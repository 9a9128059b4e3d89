//! Regions to answers.

use super::Spectrum;
use super::answer::{Answer, EntropyError, Evidence, Part, Request, Unsolved};
use super::closure::{Closure, Turn, close};
use super::cut::{Cut, Cutter};
use super::solve::solve;
use super::the_core::{Split, split};
use super::wires::Wires;
use crate::network::{Network, Region};
use crate::watch::{News, Watch};
use rayon::prelude::*;
use std::collections::HashMap;
use std::sync::{Arc, Mutex};

/// Answers regions of one network; equal pieces of cores are solved once.
///
/// ```
/// use lierne::entropy::{Asker, Evidence, Request, Wires};
/// use lierne::network::{NetworkBuilder, Region};
/// use lierne::block::{Block, Entries, IsometryTable};
/// use std::sync::Arc;
/// # use lierne::block::SparseEntries;
/// # use num_complex::Complex64;
/// // Two identities of dimension 3, side by side: a..c and b..d.
/// let block = Arc::new(Block::lazy("identity", vec![3, 3], IsometryTable::perfect(2), None, || {
///     let one = Complex64::new(1.0, 0.0);
///     Entries::Sparse(SparseEntries::collect(vec![3, 3], vec![(0, one), (4, one), (8, one)]))
/// }));
/// let mut b = NetworkBuilder::new("two threads");
/// let legs: Vec<_> = ["a", "b", "c", "d"].iter().map(|n| b.label(n, 3)).collect();
/// b.tensor(None, &[legs[0], legs[2]], &block)?;
/// b.tensor(None, &[legs[1], legs[3]], &block)?;
/// b.boundary(legs);
/// let network = b.finish()?;
/// let wires = Wires::of(&network);
/// let asker = Asker::new(&wires, Request::default());
/// let answer = asker.ask(&Region::parse("0..2", &network)?, &lierne::watch::Silent)?;
/// assert_eq!(answer.evidence, Evidence::Geometry);
/// assert!((answer.entropy().unwrap() - 9f64.ln()).abs() < 1e-12);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
pub struct Asker<'w, 'n> {
    wires: &'w Wires<'n>,
    cutter: Cutter<'w, 'n>,
    request: Request,
    solved: Mutex<HashMap<Vec<u32>, Arc<Part>>>,
}

/// A region after geometry: what is left to solve.
struct Judged {
    cut: Cut,
    split: Split,
    keys: Vec<Vec<u32>>,
}

impl<'w, 'n> Asker<'w, 'n> {
    /// Prepares a network.
    pub fn new(wires: &'w Wires<'n>, request: Request) -> Self {
        Self { wires, cutter: Cutter::new(wires), request, solved: Mutex::default() }
    }
    /// The network's wires.
    pub fn wires(&self) -> &'w Wires<'n> {
        self.wires
    }
    /// The budget and the evidence admitted.
    pub fn request(&self) -> &Request {
        &self.request
    }
    /// The minimal cut of a region, without its entropy.
    pub fn cut(&self, region: &Region) -> Cut {
        self.cutter.cut(&self.wires.inside(region))
    }
    /// The closure with the smallest core that was found, and its cut.
    ///
    /// All ways of sharing the tensors that both sides could absorb ([`Turn::ALL`]) are tried
    /// until one leaves nothing; "small" counts the legs of the core's cuts by ln(dim) first
    /// and its nodes second.
    pub fn close(&self, inside: &[bool]) -> (Closure, Cut) {
        let cut = self.cutter.cut(inside);
        let mut best: Option<(f64, usize, Closure)> = None;
        for turn in Turn::ALL {
            let closure = close(self.wires, inside, turn, Some(&cut));
            let nodes = closure.core_nodes();
            if nodes == 0 {
                return (closure, cut);
            }
            let width = split(self.wires, inside, &closure)
                .cores
                .iter()
                .map(|core| {
                    let of = |legs: &[(u32, u32)]| -> f64 {
                        legs.iter().map(|&(n, l)| self.ln_dim(n, l)).sum()
                    };
                    of(&core.region).min(of(&core.complement))
                })
                .fold(0.0, f64::max);
            let better = best
                .as_ref()
                .is_none_or(|b| width < b.0 - 1e-9 || (width < b.0 + 1e-9 && nodes < b.1));
            if better {
                best = Some((width, nodes, closure));
            }
        }
        let (_, _, closure) = best.expect("at least one way was tried");
        (closure, cut)
    }
    fn ln_dim(&self, node: u32, leg: u32) -> f64 {
        (self.wires.dim(self.wires.wires_of(node as usize)[leg as usize]) as f64).ln()
    }
    fn judge(&self, region: &Region) -> Judged {
        let inside = self.wires.inside(region);
        let (closure, cut) = self.close(&inside);
        let split = split(self.wires, &inside, &closure);
        let keys = split.cores.iter().map(|c| c.key(self.wires)).collect();
        Judged { cut, split, keys }
    }
    fn known(&self, key: &[u32]) -> Option<Arc<Part>> {
        self.solved.lock().unwrap_or_else(std::sync::PoisonError::into_inner).get(key).cloned()
    }
    /// Whether a piece is to be solved: it never was, or only time was short then and is not now.
    fn open(&self, key: &[u32], watch: &dyn Watch) -> bool {
        self.known(key).is_none_or(|part| {
            part.reason == Some(Unsolved::Time)
                && !watch.stop()
                && watch.seconds() <= self.request.seconds
        })
    }
    /// The entropy of one region.
    ///
    /// # Errors
    /// [`EntropyError`].
    pub fn ask(&self, region: &Region, watch: &dyn Watch) -> Result<Answer, EntropyError> {
        let judged = self.judge(region);
        for (core, key) in judged.split.cores.iter().zip(&judged.keys) {
            self.fill(core, key, watch)?;
        }
        Ok(self.assemble(judged))
    }
    fn fill(
        &self,
        core: &super::the_core::Core,
        key: &[u32],
        watch: &dyn Watch,
    ) -> Result<(), EntropyError> {
        if self.open(key, watch) {
            let part = solve(&core.cut_out(self.wires)?, &self.request, watch)?;
            self.solved
                .lock()
                .unwrap_or_else(std::sync::PoisonError::into_inner)
                .insert(key.to_vec(), Arc::new(part));
        }
        Ok(())
    }
    /// The entropies of many regions: geometry first, regions in parallel; then each distinct
    /// piece of a core once, small ones first; the answers come in the order of the regions
    /// and do not depend on the number of threads.
    ///
    /// # Errors
    /// [`EntropyError`]; [`EntropyError::Stopped`] where the watch asked for a stop.
    pub fn ask_all(
        &self,
        regions: &[Region],
        watch: &dyn Watch,
    ) -> Result<Vec<Answer>, EntropyError> {
        watch.tell(News::Stage("geometry"));
        let stopped = |done| EntropyError::Stopped { done, total: regions.len() };
        let judged: Vec<Option<Judged>> =
            regions.par_iter().map(|region| (!watch.stop()).then(|| self.judge(region))).collect();
        if judged.iter().any(Option::is_none) {
            return Err(stopped(0));
        }
        let judged: Vec<Judged> = judged.into_iter().flatten().collect();
        let mut open: Vec<(usize, usize, usize)> = Vec::new();
        let mut seen: HashMap<&[u32], ()> = HashMap::new();
        for (r, j) in judged.iter().enumerate() {
            for (c, key) in j.keys.iter().enumerate() {
                if seen.insert(key, ()).is_none() && self.open(key, watch) {
                    let core = &j.split.cores[c];
                    open.push((core.region.len() + core.complement.len(), r, c));
                }
            }
        }
        open.sort_unstable();
        watch.tell(News::Stage("cores"));
        for (done, &(_, r, c)) in open.iter().enumerate() {
            watch.tell(News::Progress { done: done as u64, total: open.len() as u64 });
            if watch.stop() {
                return Err(stopped(0));
            }
            self.fill(&judged[r].split.cores[c], &judged[r].keys[c], watch)?;
        }
        Ok(judged.into_iter().map(|j| self.assemble(j)).collect())
    }
    fn assemble(&self, judged: Judged) -> Answer {
        let Judged { cut, split, keys } = judged;
        let network = self.wires.network();
        let straight: f64 = split.straight.iter().map(|&l| (network.dim(l) as f64).ln()).sum();
        let mut answer = Answer {
            lower: straight,
            upper: straight,
            evidence: Evidence::Geometry,
            error: 0.0,
            spectrum: Some(Spectrum::flat(straight)),
            straight,
            parts: Vec::with_capacity(keys.len()),
            cores: split.cores.iter().map(|c| c.tensors(self.wires)).collect(),
            cut,
        };
        for key in &keys {
            let part = self.known(key).expect("every piece was solved or bounded before");
            answer.lower += part.lower;
            answer.upper += part.upper;
            answer.error += part.error;
            answer.evidence = answer.evidence.max(part.evidence);
            answer.spectrum = match (answer.spectrum.take(), &part.spectrum) {
                (Some(a), Some(b)) => Some(a.times(b)),
                _ => None,
            };
            answer.parts.push(Part::clone(&part));
        }
        if answer.evidence >= Evidence::Estimate {
            answer.upper = answer.upper.min(answer.cut.nats).max(answer.lower);
        }
        if answer.evidence == Evidence::Geometry {
            // The same sum as the cut's, in another order of addition.
            let exact = (answer.upper - answer.cut.nats).abs() < 1e-9;
            if exact {
                answer.lower = answer.cut.nats;
                answer.upper = answer.cut.nats;
            }
        }
        answer
    }
}

/// The entropy of one region of a network. For many regions of one network keep an
/// [`Asker`].
///
/// # Errors
/// [`EntropyError`].
pub fn of_region(
    network: &Network,
    region: &Region,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Answer, EntropyError> {
    let wires = Wires::of(network);
    Asker::new(&wires, request.clone()).ask(region, watch)
}
