//! Fixing further labels until a plan fits the memory.

use super::ContractError;
use super::program::Program;
use crate::order::{Plan, Shape};
use crate::tensor::Label;

/// Tensors whose labels are tried.
const LARGEST: usize = 6;

fn entries(program: &Program, labels: &[Label]) -> f64 {
    labels.iter().map(|l| program.sizes[l.index()] as f64).product()
}

/// Entries alive at once in one slice, if every step's operands and result are; the large
/// steps decide, so the exact schedule does not matter here.
fn widest(program: &Program) -> f64 {
    let n = program.leaves.len();
    let mut sizes: Vec<f64> = program.leaves.iter().map(|l| entries(program, &l.labels)).collect();
    let mut most: f64 = sizes.iter().copied().fold(0.0, f64::max);
    for step in &program.steps {
        let out: f64 =
            [&step.batch, &step.rows, &step.columns].iter().map(|g| entries(program, g)).product();
        let [a, b] = step.operands;
        most = most.max(sizes[a] + sizes[b] + out);
        sizes.push(out);
    }
    debug_assert_eq!(sizes.len(), n + program.steps.len());
    most
}

/// One more label sliced: of the labels on the largest tensors the one that costs least in
/// multiply-adds for what it frees. `None` where no label frees anything.
pub(super) fn one_more(shape: &Shape, plan: &Plan) -> Result<Option<Plan>, ContractError> {
    let program = Program::compile(shape, plan)?;
    let now = widest(&program);
    let adds = |p: &Program| (p.multiply_adds() as f64).max(1.0) * p.slices as f64;
    let work = adds(&program);
    let mut sets: Vec<Vec<Label>> = program.leaves.iter().map(|l| l.labels.clone()).collect();
    for step in &program.steps {
        sets.push([&step.batch[..], &step.rows, &step.columns].concat());
    }
    sets.sort_by(|a, b| entries(&program, b).total_cmp(&entries(&program, a)));
    let mut tried: Vec<Label> = sets
        .iter()
        .take(LARGEST)
        .flatten()
        .copied()
        .filter(|l| program.sizes[l.index()] > 1)
        .collect();
    tried.sort_unstable();
    tried.dedup();
    let mut best: Option<(f64, Plan)> = None;
    for label in tried {
        let mut next = plan.clone();
        next.sliced.push(label);
        let Ok(sliced) = Program::compile(shape, &next) else { continue };
        let gain = (now / widest(&sliced)).ln();
        if gain < 1e-6 {
            continue;
        }
        let loss = (adds(&sliced) / work).ln().max(0.0);
        let figure = loss / gain - 1e-9 * gain;
        if best.as_ref().is_none_or(|b| figure < b.0) {
            best = Some((figure, next));
        }
    }
    Ok(best.map(|b| b.1))
}
