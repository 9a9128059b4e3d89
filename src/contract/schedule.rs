//! In which sequence the steps are run, which subtrees run side by side, and how many bytes
//! that takes.

use super::layout::{Layout, Numbers};
use super::program::Program;

/// Subtrees estimated to take less than this many nanoseconds are not worth a thread.
const WORTH_A_THREAD: f64 = 100_000.0;
/// Forks within forks; deeper ones run in sequence.
const DEEPEST: usize = 48;

/// One thing to do.
#[derive(Debug, Clone, Copy)]
pub(super) enum Item {
    /// This step.
    Step(usize),
    /// Two segments side by side.
    Fork(usize, usize),
}

/// The steps of a program in an order that keeps few tensors alive: of two operands the one
/// whose making takes more room beyond its own size is made first.
#[derive(Debug, Clone)]
pub(super) struct Schedule {
    pub segments: Vec<Vec<Item>>,
    /// The segment that ends with the last step; `None` for a single tensor.
    pub root: Option<usize>,
    /// Most bytes alive at once in one slice.
    pub peak: u64,
}

struct Maker<'a> {
    program: &'a Program,
    forked: Vec<bool>,
    first: Vec<bool>,
    segments: Vec<Vec<Item>>,
}

impl Schedule {
    /// The steps as the plan lists them, one after the other; the peak is not reckoned.
    pub fn in_order(program: &Program) -> Self {
        let steps: Vec<Item> = (0..program.steps.len()).map(Item::Step).collect();
        let root = (!steps.is_empty()).then_some(0);
        Self { segments: vec![steps], root, peak: 0 }
    }

    /// Plans the sequence for these numbers. `block_entries` holds the entries of
    /// each leaf's block. Subtrees run side by side only if `room` bytes suffice for it.
    pub fn plan(
        program: &Program,
        layout: &Layout,
        numbers: Numbers,
        block_entries: &[u64],
        room: u64,
    ) -> Self {
        let together = Self::with_forks(program, layout, numbers, block_entries, true);
        if together.peak <= room {
            return together;
        }
        Self::with_forks(program, layout, numbers, block_entries, false)
    }

    fn with_forks(
        program: &Program,
        layout: &Layout,
        numbers: Numbers,
        block_entries: &[u64],
        forks: bool,
    ) -> Self {
        let bytes = numbers.bytes;
        let n = program.leaves.len();
        let nodes = n + program.steps.len();
        let size = |node: usize| (program.entries(&layout.orders[node]) * bytes) as u64;
        let mut peak = vec![0u64; nodes];
        let mut time = vec![0f64; nodes];
        let mut depth = vec![0usize; nodes];
        let mut forked = vec![false; program.steps.len()];
        let mut first = vec![true; program.steps.len()];
        for t in 0..n {
            peak[t] = (block_entries[t] * bytes as u64).saturating_add(2 * size(t));
        }
        for (s, step) in program.steps.iter().enumerate() {
            let [a, b] = step.operands;
            let (sa, sb) = (size(a), size(b));
            let moved = layout.steps[s].moved.each_ref().map(Option::is_some);
            let extra =
                size(n + s).max(if moved[0] { sa } else { 0 }).max(if moved[1] { sb } else { 0 });
            let at_step = sa + sb + extra;
            forked[s] =
                forks && time[a].min(time[b]) >= WORTH_A_THREAD && depth[a].max(depth[b]) < DEEPEST;
            // Made first: the operand with more room above its own size.
            first[s] = peak[a] - sa.min(peak[a]) >= peak[b] - sb.min(peak[b]);
            let making = if forked[s] {
                peak[a] + peak[b]
            } else if first[s] {
                peak[a].max(sa + peak[b])
            } else {
                peak[b].max(sb + peak[a])
            };
            peak[n + s] = making.max(at_step);
            let own = layout.steps[s].loops.nanoseconds(numbers.complex, bytes);
            time[n + s] = time[a] + time[b] + own;
            depth[n + s] = depth[a].max(depth[b]) + usize::from(forked[s]);
        }
        let root = nodes - 1;
        let order_moved = layout.orders[root] != program.open;
        let whole = peak[root].max(size(root) * if order_moved { 2 } else { 1 });
        let mut maker = Maker { program, forked, first, segments: Vec::new() };
        let root = (root >= n).then(|| maker.segment(root));
        Self { segments: maker.segments, root, peak: whole }
    }
}

impl Maker<'_> {
    /// The segment that makes a step's result.
    fn segment(&mut self, root: usize) -> usize {
        let n = self.program.leaves.len();
        let mut items = Vec::new();
        let mut stack = vec![(root, false)];
        while let Some((node, ready)) = stack.pop() {
            let Some(s) = node.checked_sub(n) else { continue };
            let [a, b] = self.program.steps[s].operands;
            if ready {
                items.push(Item::Step(s));
            } else if self.forked[s] {
                let (x, y) = (self.segment(a), self.segment(b));
                items.extend([Item::Fork(x, y), Item::Step(s)]);
            } else {
                stack.push((node, true));
                let (first, second) = if self.first[s] { (a, b) } else { (b, a) };
                stack.extend([(second, false), (first, false)]);
            }
        }
        self.segments.push(items);
        self.segments.len() - 1
    }
}
