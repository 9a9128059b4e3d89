//! Maximal flow on compressed rows.

/// A capacity that no cut ever pays.
pub(super) const ENDLESS: u64 = u64::MAX / 4;

/// A flow network whose arcs come in opposite pairs.
#[derive(Debug, Clone)]
pub(super) struct Flow {
    starts: Vec<u32>,
    head: Vec<u32>,
    mate: Vec<u32>,
    residual: Vec<u64>,
    /// Place of the forward arc of each pair, in the order in which pairs were given.
    place: Vec<u32>,
}

impl Flow {
    /// Joins `vertices` by pairs (tail, head, capacity forward, capacity backward).
    pub(super) fn new(vertices: usize, pairs: &[(u32, u32, u64, u64)]) -> Self {
        let mut starts = vec![0u32; vertices + 1];
        for &(a, b, ..) in pairs {
            starts[a as usize + 1] += 1;
            starts[b as usize + 1] += 1;
        }
        for v in 0..vertices {
            starts[v + 1] += starts[v];
        }
        let mut next = starts.clone();
        let arcs = 2 * pairs.len();
        let (mut head, mut mate, mut residual) =
            (vec![0u32; arcs], vec![0u32; arcs], vec![0u64; arcs]);
        let mut place = Vec::with_capacity(pairs.len());
        for &(a, b, forward, backward) in pairs {
            let i = next[a as usize];
            next[a as usize] += 1;
            let j = next[b as usize];
            next[b as usize] += 1;
            head[i as usize] = b;
            head[j as usize] = a;
            mate[i as usize] = j;
            mate[j as usize] = i;
            residual[i as usize] = forward;
            residual[j as usize] = backward;
            place.push(i);
        }
        Self { starts, head, mate, residual, place }
    }
    /// Sets the capacities of a pair; only before a flow was sent.
    pub(super) fn set(&mut self, pair: usize, forward: u64, backward: u64) {
        let i = self.place[pair] as usize;
        self.residual[i] = forward;
        let j = self.mate[i] as usize;
        self.residual[j] = backward;
    }
    fn arcs(&self, v: u32) -> std::ops::Range<usize> {
        self.starts[v as usize] as usize..self.starts[v as usize + 1] as usize
    }
    /// Sends the greatest flow from `source` to `sink`; the residual network stays behind.
    ///
    /// Blocking flows on level graphs, O(V²·E) at worst (Soviet Math. Dokl. 11, 1277 (1970)).
    /// Levels are counted back from the sink.
    pub(super) fn send(&mut self, source: u32, sink: u32) -> u64 {
        let n = self.starts.len() - 1;
        let mut level = vec![u32::MAX; n];
        let mut at = vec![0u32; n];
        let mut queue: Vec<u32> = Vec::with_capacity(n);
        let mut path: Vec<usize> = Vec::new();
        let mut total = 0;
        loop {
            level.fill(u32::MAX);
            level[sink as usize] = 0;
            queue.clear();
            queue.push(sink);
            let mut k = 0;
            while k < queue.len() && level[source as usize] == u32::MAX {
                let v = queue[k];
                k += 1;
                for i in self.arcs(v) {
                    let u = self.head[i];
                    if level[u as usize] == u32::MAX && self.residual[self.mate[i] as usize] > 0 {
                        level[u as usize] = level[v as usize] + 1;
                        queue.push(u);
                    }
                }
            }
            if level[source as usize] == u32::MAX {
                return total;
            }
            at.copy_from_slice(&self.starts[..n]);
            path.clear();
            let mut v = source;
            loop {
                if v == sink {
                    let push = path.iter().map(|&i| self.residual[i]).min().unwrap_or(0);
                    total += push;
                    let mut cut = path.len();
                    for (k, &i) in path.iter().enumerate().rev() {
                        self.residual[i] -= push;
                        let j = self.mate[i] as usize;
                        self.residual[j] += push;
                        if self.residual[i] == 0 {
                            cut = k;
                        }
                    }
                    v = self.head[self.mate[path[cut]] as usize];
                    path.truncate(cut);
                    continue;
                }
                let end = self.starts[v as usize + 1];
                let mut advanced = false;
                while at[v as usize] < end {
                    let i = at[v as usize] as usize;
                    let u = self.head[i];
                    if self.residual[i] > 0
                        && level[u as usize] != u32::MAX
                        && level[u as usize] + 1 == level[v as usize]
                    {
                        path.push(i);
                        v = u;
                        advanced = true;
                        break;
                    }
                    at[v as usize] += 1;
                }
                if !advanced {
                    let Some(i) = path.pop() else { break };
                    v = self.head[self.mate[i] as usize];
                    at[v as usize] += 1;
                }
            }
        }
    }
    /// Which vertices the source still reaches.
    pub(super) fn reached_from(&self, source: u32) -> Vec<bool> {
        self.spread(source, |i| self.residual[i] > 0)
    }
    /// Which vertices still reach the sink.
    pub(super) fn reaching(&self, sink: u32) -> Vec<bool> {
        self.spread(sink, |i| self.residual[self.mate[i] as usize] > 0)
    }
    fn spread(&self, from: u32, open: impl Fn(usize) -> bool) -> Vec<bool> {
        let mut seen = vec![false; self.starts.len() - 1];
        seen[from as usize] = true;
        let mut stack = vec![from];
        while let Some(v) = stack.pop() {
            for i in self.arcs(v) {
                let u = self.head[i] as usize;
                if !seen[u] && open(i) {
                    seen[u] = true;
                    stack.push(u as u32);
                }
            }
        }
        seen
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::{Rng, SeedableRng};
    use rand_chacha::ChaCha8Rng;

    /// Least capacity over all vertex sets that hold the source but not the sink.
    fn least_cut(vertices: usize, pairs: &[(u32, u32, u64, u64)]) -> u64 {
        (0..1u32 << (vertices - 2))
            .map(|mask| {
                let inside = |v: u32| v == 0 || (v > 1 && mask >> (v - 2) & 1 == 1);
                pairs
                    .iter()
                    .map(|&(a, b, f, r)| match (inside(a), inside(b)) {
                        (true, false) => f,
                        (false, true) => r,
                        _ => 0,
                    })
                    .sum()
            })
            .min()
            .expect("at least the source alone")
    }

    #[test]
    fn the_greatest_flow_is_the_least_cut_of_all() {
        let mut rng = ChaCha8Rng::seed_from_u64(7);
        for _ in 0..300 {
            let vertices = rng.random_range(2..9usize);
            let pairs: Vec<_> = (0..rng.random_range(0..20))
                .map(|_| {
                    let a = rng.random_range(0..vertices as u32);
                    let b = (a + rng.random_range(1..vertices as u32)) % vertices as u32;
                    (a, b, rng.random_range(0..6), rng.random_range(0..6))
                })
                .collect();
            let mut flow = Flow::new(vertices, &pairs);
            assert_eq!(flow.send(0, 1), least_cut(vertices, &pairs), "{pairs:?}");
        }
    }
}
