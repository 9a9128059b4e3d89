//! In which order the axes of every intermediate lie, and where they are moved.

use super::program::{Program, Step};
use crate::tensor::{Join, Label, Leg};

/// How one step is carried out on dense tensors.
#[derive(Debug, Clone)]
pub(super) struct StepLayout {
    /// The order into which an operand is brought first, where that pays.
    pub moved: [Option<Vec<Label>>; 2],
    /// The loops.
    pub join: Join,
}

/// The axes of every tensor of a program.
#[derive(Debug, Clone)]
pub(super) struct Layout {
    /// Order of the axes as a leaf is brought in or a step leaves them, one list a tensor.
    pub orders: Vec<Vec<Label>>,
    /// One a step.
    pub steps: Vec<StepLayout>,
}

/// Row-major steps of axes in this order.
pub(super) fn strides(order: &[Label], sizes: &[usize]) -> Vec<usize> {
    let mut steps = vec![1; order.len()];
    for i in (1..order.len()).rev() {
        steps[i - 1] = steps[i] * sizes[order[i].index()];
    }
    steps
}

impl Layout {
    /// Plans all orders.
    pub fn plan(program: &Program) -> Self {
        let sizes = &program.sizes;
        let mut orders: Vec<Vec<Label>> = program.leaves.iter().map(|l| l.labels.clone()).collect();
        let mut steps = Vec::with_capacity(program.steps.len());
        for step in &program.steps {
            let [x, y] = step.operands;
            let out: Vec<Label> =
                step.batch.iter().chain(&step.rows).chain(&step.columns).copied().collect();
            let a: Vec<Label> =
                step.batch.iter().chain(&step.rows).chain(&step.sum).copied().collect();
            let b: Vec<Label> =
                step.batch.iter().chain(&step.sum).chain(&step.columns).copied().collect();
            let moved = [(a != orders[x]).then(|| a.clone()), (b != orders[y]).then(|| b.clone())];
            steps.push(StepLayout { moved, join: join(step, &a, &b, &out, sizes) });
            orders.push(out);
        }
        Self { orders, steps }
    }
}

/// The loops of a step for axes in these orders.
fn join(step: &Step, a: &[Label], b: &[Label], out: &[Label], sizes: &[usize]) -> Join {
    let (sa, sb, sc) = (strides(a, sizes), strides(b, sizes), strides(out, sizes));
    let at = |order: &[Label], steps: &[usize], l: Label| {
        order.iter().position(|&x| x == l).map_or(0, |i| steps[i])
    };
    let legs = |labels: &[Label]| {
        labels
            .iter()
            .map(|&l| Leg {
                size: sizes[l.index()],
                left: at(a, &sa, l),
                right: at(b, &sb, l),
                out: at(out, &sc, l),
            })
            .collect()
    };
    Join {
        batch: legs(&step.batch),
        rows: legs(&step.rows),
        sum: legs(&step.sum),
        columns: legs(&step.columns),
    }
}
