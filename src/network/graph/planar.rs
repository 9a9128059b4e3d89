//! Whether a graph can be drawn in the plane without crossings.

const NONE: u32 = u32::MAX;

/// Whether the graph of n vertices with these edges is planar. Loops and repeated edges do not
/// matter.
///
/// The left–right criterion on a depth-first tree: back edges that would enclose each other
/// must be laid on opposite sides, and the graph is planar when sides can be chosen (Int. J.
/// Found. Comput. Sci. 17, 1017 (2006)). Linear time but for one sort of each vertex's edges;
/// no recursion.
pub fn is_planar(n: usize, edges: &[(u32, u32)]) -> bool {
    let mut simple: Vec<(u32, u32)> =
        edges.iter().filter(|(a, b)| a != b).map(|&(a, b)| (a.min(b), a.max(b))).collect();
    simple.sort_unstable();
    simple.dedup();
    let m = simple.len();
    if n < 5 || m < 9 {
        return true;
    }
    if m > 3 * n - 6 {
        return false;
    }
    let mut tree = Tree::grow(n, &simple);
    tree.sides_exist()
}

/// A depth-first tree of a graph, every edge directed away from where it was first met.
struct Tree {
    from: Vec<u32>,
    to: Vec<u32>,
    roots: Vec<u32>,
    height: Vec<u32>,
    parent_edge: Vec<u32>,
    /// Height of the lowest vertex that an edge, or what hangs on it, returns to.
    low: Vec<u32>,
    /// Outgoing edges, those that must be nested outermost first.
    out: Vec<u32>,
    out_starts: Vec<u32>,
    stack: Vec<Pair>,
    stack_bottom: Vec<u32>,
    low_edge: Vec<u32>,
    /// The next edge of the same interval, further down.
    next: Vec<u32>,
}

/// Back edges that must lie on one side, from the one that returns highest to the lowest.
#[derive(Clone, Copy)]
struct Interval {
    low: u32,
    high: u32,
}

const EMPTY: Interval = Interval { low: NONE, high: NONE };

/// Two intervals that must lie on opposite sides.
#[derive(Clone, Copy)]
struct Pair {
    left: Interval,
    right: Interval,
}

impl Interval {
    fn is_empty(self) -> bool {
        self.low == NONE && self.high == NONE
    }
}

impl Tree {
    fn grow(n: usize, edges: &[(u32, u32)]) -> Self {
        let m = edges.len();
        let mut starts = vec![0u32; n + 1];
        for &(a, b) in edges {
            starts[a as usize + 1] += 1;
            starts[b as usize + 1] += 1;
        }
        for v in 0..n {
            starts[v + 1] += starts[v];
        }
        let mut fill = starts.clone();
        let mut around = vec![0u32; 2 * m];
        for (e, &(a, b)) in edges.iter().enumerate() {
            for v in [a, b] {
                around[fill[v as usize] as usize] = e as u32;
                fill[v as usize] += 1;
            }
        }
        let (mut from, mut to) = (vec![NONE; m], vec![NONE; m]);
        let (mut height, mut parent_edge) = (vec![NONE; n], vec![NONE; n]);
        let (mut low, mut low2, mut nesting) = (vec![0u32; m], vec![0u32; m], vec![0u32; m]);
        let mut roots = Vec::new();
        let mut at: Vec<u32> = starts[..n].to_vec();
        let mut path: Vec<u32> = Vec::new();
        for root in 0..n as u32 {
            if height[root as usize] != NONE {
                continue;
            }
            height[root as usize] = 0;
            roots.push(root);
            path.push(root);
            while let Some(&v) = path.last() {
                let v = v as usize;
                let done = if at[v] < starts[v + 1] {
                    let e = around[at[v] as usize] as usize;
                    if from[e] != NONE {
                        at[v] += 1;
                        continue;
                    }
                    let (a, b) = edges[e];
                    let w = if a as usize == v { b } else { a };
                    (from[e], to[e]) = (v as u32, w);
                    (low[e], low2[e]) = (height[v], height[v]);
                    if height[w as usize] == NONE {
                        parent_edge[w as usize] = e as u32;
                        height[w as usize] = height[v] + 1;
                        path.push(w);
                        continue;
                    }
                    low[e] = height[w as usize];
                    e
                } else {
                    path.pop();
                    match parent_edge[v] {
                        NONE => continue,
                        e => e as usize,
                    }
                };
                // Edge `done` and all that hangs on it is known now.
                let u = from[done] as usize;
                at[u] += 1;
                nesting[done] = 2 * low[done] + u32::from(low2[done] < height[u]);
                let p = parent_edge[u];
                if p != NONE {
                    let p = p as usize;
                    if low[done] < low[p] {
                        low2[p] = low[p].min(low2[done]);
                        low[p] = low[done];
                    } else if low[done] > low[p] {
                        low2[p] = low2[p].min(low[done]);
                    } else {
                        low2[p] = low2[p].min(low2[done]);
                    }
                }
            }
        }
        let mut out: Vec<u32> = (0..m as u32).collect();
        out.sort_unstable_by_key(|&e| (from[e as usize], nesting[e as usize], e));
        let mut out_starts = vec![0u32; n + 1];
        for &v in &from {
            out_starts[v as usize + 1] += 1;
        }
        for v in 0..n {
            out_starts[v + 1] += out_starts[v];
        }
        Self {
            from,
            to,
            roots,
            height,
            parent_edge,
            low,
            out,
            out_starts,
            stack: Vec::new(),
            stack_bottom: vec![0; m],
            low_edge: vec![NONE; m],
            next: vec![NONE; m],
        }
    }

    fn sides_exist(&mut self) -> bool {
        let mut at: Vec<u32> = self.out_starts.clone();
        let mut path: Vec<u32> = Vec::new();
        for root in std::mem::take(&mut self.roots) {
            path.push(root);
            while let Some(&v) = path.last() {
                let vertex = v as usize;
                let done = if at[vertex] < self.out_starts[vertex + 1] {
                    let e = self.out[at[vertex] as usize];
                    self.stack_bottom[e as usize] = self.stack.len() as u32;
                    let w = self.to[e as usize];
                    if self.parent_edge[w as usize] == e {
                        path.push(w);
                        continue;
                    }
                    self.low_edge[e as usize] = e;
                    let right = Interval { low: e, high: e };
                    self.stack.push(Pair { left: EMPTY, right });
                    e
                } else {
                    path.pop();
                    match self.parent_edge[vertex] {
                        NONE => continue,
                        e => {
                            self.drop_ending_at(self.from[e as usize], e);
                            e
                        }
                    }
                };
                let u = self.from[done as usize] as usize;
                if self.low[done as usize] < self.height[u] {
                    let above = self.parent_edge[u];
                    if at[u] == self.out_starts[u] {
                        self.low_edge[above as usize] = self.low_edge[done as usize];
                    } else if !self.constrain(done, above) {
                        return false;
                    }
                }
                at[u] += 1;
            }
        }
        true
    }

    fn conflicts(&self, interval: Interval, edge: u32) -> bool {
        !interval.is_empty() && self.low[interval.high as usize] > self.low[edge as usize]
    }

    /// Adds what edge `e`, hanging on the end of edge `above`, demands of the sides.
    fn constrain(&mut self, e: u32, above: u32) -> bool {
        let mut whole = Pair { left: EMPTY, right: EMPTY };
        // The back edges of `e` itself all lie on one side.
        while self.stack.len() as u32 > self.stack_bottom[e as usize] {
            let Some(mut pair) = self.stack.pop() else { break };
            if !pair.left.is_empty() {
                std::mem::swap(&mut pair.left, &mut pair.right);
            }
            if !pair.left.is_empty() {
                return false;
            }
            let low = pair.right.low as usize;
            if self.low[low] > self.low[above as usize] {
                if whole.right.is_empty() {
                    whole.right.high = pair.right.high;
                } else {
                    self.next[whole.right.low as usize] = pair.right.high;
                }
                whole.right.low = pair.right.low;
            } else {
                self.next[low] = self.low_edge[above as usize];
            }
        }
        // Those of earlier edges that return above where `e` returns lie on the other.
        while let Some(&top) = self.stack.last() {
            if !self.conflicts(top.left, e) && !self.conflicts(top.right, e) {
                break;
            }
            self.stack.pop();
            let mut pair = top;
            if self.conflicts(pair.right, e) {
                std::mem::swap(&mut pair.left, &mut pair.right);
            }
            if self.conflicts(pair.right, e) {
                return false;
            }
            if whole.right.low != NONE {
                self.next[whole.right.low as usize] = pair.right.high;
            }
            if pair.right.low != NONE {
                whole.right.low = pair.right.low;
                if whole.right.high == NONE {
                    whole.right.high = pair.right.high;
                }
            }
            if whole.left.is_empty() {
                whole.left.high = pair.left.high;
            } else {
                self.next[whole.left.low as usize] = pair.left.high;
            }
            whole.left.low = pair.left.low;
        }
        if !(whole.left.is_empty() && whole.right.is_empty()) {
            self.stack.push(whole);
        }
        true
    }

    fn lowest(&self, pair: Pair) -> u32 {
        let low = |i: Interval| if i.low == NONE { NONE } else { self.low[i.low as usize] };
        low(pair.left).min(low(pair.right))
    }

    /// Forgets back edges that end at `u`, from which tree edge `e` leads down.
    fn drop_ending_at(&mut self, u: u32, e: u32) {
        let height = self.height[u as usize];
        while self.stack.last().is_some_and(|&p| self.lowest(p) == height) {
            self.stack.pop();
        }
        if let Some(mut pair) = self.stack.pop() {
            let (left, right) = (pair.left, pair.right);
            pair.left = self.trimmed(left, u, right.low);
            let other = pair.left.low;
            pair.right = self.trimmed(right, u, other);
            self.stack.push(pair);
        }
        if self.low[e as usize] < height
            && let Some(top) = self.stack.last()
        {
            let (l, r) = (top.left.high, top.right.high);
            let left = l != NONE && (r == NONE || self.low[l as usize] > self.low[r as usize]);
            self.next[e as usize] = if left { l } else { r };
        }
    }

    fn trimmed(&mut self, mut interval: Interval, u: u32, other_low: u32) -> Interval {
        while interval.high != NONE && self.to[interval.high as usize] == u {
            interval.high = self.next[interval.high as usize];
        }
        if interval.high == NONE && interval.low != NONE {
            self.next[interval.low as usize] = other_low;
            interval.low = NONE;
        }
        interval
    }
}
