//! From arguments to requests, and the run.

use super::super::{Common, Failure, Verdict};
use super::Args;
use super::{certificate, show};
use crate::entropy::measure::{self, Measure};
use crate::entropy::{Answer, Asker, Evidence, Intervals, Request, Wires, fit};
use crate::network::{Limits, Network, Region, load};
use crate::watch::Watch;
use rand::SeedableRng;
use rand::seq::SliceRandom;
use rand_chacha::ChaCha8Rng;

/// Most sites for all subsets.
const MOST_SUBSET_SITES: usize = 20;
/// From this many intervals on, answers come from one table of the whole state where it can
/// be had, without a record of each interval's cut.
const TABLE_FROM: usize = 3000;

/// The rows of the output.
pub(super) struct Row {
    pub(super) region: Region,
    pub(super) answer: Found,
}

/// One region's answer, full or from the table of all intervals.
pub(super) enum Found {
    Full(Box<Answer>),
    Table { cut: f64, entropy: f64, evidence: Evidence },
}

/// Runs all that is asked of regions.
pub(super) fn run(args: &Args, memory: u64, common: &Common) -> Result<Verdict, Failure> {
    let network = load(&args.network, &Limits::default())?;
    let wires = Wires::of(&network);
    let request = Request {
        memory_bytes: memory,
        log10_multiply_adds: args.work,
        seconds: args.seconds.unwrap_or(f64::INFINITY),
        estimate: args.estimate,
        seed: args.seed,
        ..Request::default()
    };
    let asker = Asker::new(&wires, request);
    let regions = regions(args, &network)?;
    if let Some(path) = &args.certificate {
        let first = regions
            .first()
            .ok_or_else(|| Failure::new("--certificate needs a region to write about"))?;
        certificate::write(&asker, first, path)?;
    }
    if !args.and.is_empty() {
        return several(args, &network, &asker, &regions, common);
    }
    if let Some(wide) = args.measure.iter().find(|m| m.regions().0 > 1) {
        return Err(Failure::new(format!(
            "{wide} takes {} regions: give the first by --region and the others by --and",
            wide.regions().0
        )));
    }
    let rows = if args.cut {
        regions
            .into_iter()
            .map(|region| {
                let cut = asker.cut(&region).nats;
                Row {
                    region,
                    answer: Found::Table { cut, entropy: cut, evidence: Evidence::Bounds },
                }
            })
            .collect()
    } else if args.intervals && regions.len() >= TABLE_FROM {
        table(&asker, regions, common)?
    } else {
        let answers = asker.ask_all(&regions, common)?;
        regions
            .into_iter()
            .zip(answers)
            .map(|(region, a)| Row { region, answer: Found::Full(Box::new(a)) })
            .collect()
    };
    let mut negativity = Vec::new();
    if args.measure.contains(&Measure::Negativity) {
        for row in &rows {
            let regions = std::slice::from_ref(&row.region);
            negativity.push(measure::of(&asker, Measure::Negativity, regions, common)?);
        }
    }
    common.clear();
    let averages = args.average.then(|| averages(&rows, network.boundary().len()));
    let fitted = averages.as_ref().and_then(|a| fit(a, network.boundary().len()));
    show::print(args, &network, &rows, &negativity, averages.as_deref(), fitted, common)?;
    Ok(Verdict::Yes)
}

fn averages(rows: &[Row], sites: usize) -> Vec<(usize, f64)> {
    let mut sums = vec![(0.0, 0usize); sites + 1];
    for row in rows {
        let entropy = match &row.answer {
            Found::Full(a) => a.entropy(),
            Found::Table { entropy, .. } => Some(*entropy),
        };
        if let Some(s) = entropy {
            let at = &mut sums[row.region.sites()];
            at.0 += s;
            at.1 += 1;
        }
    }
    // A length at which some interval is only bounded has no average.
    (1..sites).filter(|&l| sums[l].1 == sites).map(|l| (l, sums[l].0 / sites as f64)).collect()
}

/// All intervals through the dual and the clipped form; those that the table leaves open one
/// by one.
fn table(
    asker: &Asker<'_, '_>,
    regions: Vec<Region>,
    common: &Common,
) -> Result<Vec<Row>, Failure> {
    let wires = asker.wires();
    let all = Intervals::of(wires, asker.request().finite_field, common)?;
    let sites = all.sites();
    if all.exact(0, 0).is_none() || !all.is_planar() {
        let answers = asker.ask_all(&regions, common)?;
        return Ok(regions
            .into_iter()
            .zip(answers)
            .map(|(region, a)| Row { region, answer: Found::Full(Box::new(a)) })
            .collect());
    }
    let mut rows: Vec<Option<(f64, f64)>> = vec![None; regions.len()];
    let mut by_start: Vec<Vec<(usize, usize)>> = vec![Vec::new(); sites];
    for (k, region) in regions.iter().enumerate() {
        let flags = region.flags();
        let start = (0..sites).find(|&s| flags[s] && !flags[(s + sites - 1) % sites]).unwrap_or(0);
        by_start[start].push((k, region.sites()));
    }
    for (start, members) in by_start.iter().enumerate() {
        if common.stop() {
            return Err(Failure::new(format!("stopped after the intervals from {start} sites")));
        }
        let cuts = all.cuts_from(wires, start);
        for &(k, length) in members {
            rows[k] = all.exact(start, length).map(|s| (cuts[length], s));
        }
    }
    Ok(regions
        .into_iter()
        .zip(rows)
        .map(|(region, row)| {
            let (cut, entropy) = row.expect("the table holds every interval");
            Row { region, answer: Found::Table { cut, entropy, evidence: Evidence::FiniteField } }
        })
        .collect())
}

/// Regions in the order in which they were asked for.
fn regions(args: &Args, network: &Network) -> Result<Vec<Region>, Failure> {
    let sites = network.boundary().len();
    let mut all = Vec::new();
    for text in &args.region {
        all.push(Region::parse(text, network)?);
    }
    if args.intervals {
        if let Some(l) = args.length
            && l > sites
        {
            return Err(Failure::new(format!("--length {l}: the boundary has {sites} sites")));
        }
        let lengths = args.length.map_or(1..sites, |l| l..l + 1);
        for length in lengths {
            all.extend((0..sites).map(|start| Region::interval(start, length, sites)));
        }
    }
    if let Some(count) = args.random {
        if args.unions == 0 || 2 * args.unions > sites {
            return Err(Failure::new(format!(
                "--unions {}: a boundary of {sites} sites holds 1 to {} separate intervals",
                args.unions,
                sites / 2
            )));
        }
        all.extend(unions(sites, args.unions, count, args.seed));
    }
    if args.all_subsets {
        if sites > MOST_SUBSET_SITES {
            return Err(Failure::new(format!(
                "--all-subsets: {sites} sites have 2^{sites} subsets; at most \
                 {MOST_SUBSET_SITES} sites are taken"
            )));
        }
        all.extend(
            (0..1u64 << sites).map(|set| {
                Region::new((0..sites).map(|k| set >> k & 1 == 1).collect(), Vec::new())
            }),
        );
    }
    if all.is_empty() {
        return Err(Failure::new(
            "no region was asked for: give --region, --intervals, --random or --all-subsets",
        ));
    }
    Ok(all)
}

/// Unions of `parts` intervals that do not touch, their 2·parts ends drawn at random.
pub(super) fn unions(sites: usize, parts: usize, count: usize, seed: u64) -> Vec<Region> {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut ends: Vec<usize> = (0..sites).collect();
    (0..count)
        .map(|_| {
            let (drawn, _) = ends.partial_shuffle(&mut rng, 2 * parts);
            let mut drawn = drawn.to_vec();
            drawn.sort_unstable();
            let mut flags = vec![false; sites];
            for pair in drawn.chunks(2) {
                flags[pair[0]..pair[1]].fill(true);
            }
            Region::new(flags, Vec::new())
        })
        .collect()
}

/// Measures of two or three regions.
fn several(
    args: &Args,
    network: &Network,
    asker: &Asker<'_, '_>,
    regions: &[Region],
    common: &Common,
) -> Result<Verdict, Failure> {
    let [first] = regions else {
        return Err(Failure::new("--and goes with exactly one --region"));
    };
    let mut all = vec![first.clone()];
    for text in &args.and {
        all.push(Region::parse(text, network)?);
    }
    let measures = match &args.measure[..] {
        [] if all.len() == 2 => vec![Measure::MutualInformation],
        [] => vec![Measure::TripartiteInformation],
        given => given.to_vec(),
    };
    let mut found = Vec::new();
    for m in measures {
        found.push((m, measure::of(asker, m, &all, common)?));
    }
    common.clear();
    show::measures(network, &all, &found, common)?;
    Ok(Verdict::Yes)
}
