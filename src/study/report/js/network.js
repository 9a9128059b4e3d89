/** Cuts and closures of regions, found here. */
class Net {
  constructor(c) {
    const g = c.graphData;
    this.legs = g.legs;
    this.tensors = g.legs.length;
    this.n = g.boundary.length;
    this.boundary = g.boundary;
    this.holders = Array.from({ length: g.labels }, () => []);
    g.legs.forEach((legs, t) => legs.forEach((l) => this.holders[l].push(t)));
    this.ends = this.holders.map((h) => new Set(h).size);
    this.dims = c.dims;
    this.siteOf = new Int32Array(g.labels).fill(-1);
    g.boundary.forEach((l, s) => { this.siteOf[l] = s; });
    this.isBulk = new Uint8Array(g.labels);
    g.bulk.forEach((l) => { this.isBulk[l] = 1; });
    this.block = unroll(c.blockOf);
    this.tables = c.tables;
    this.build();
  }
  weight(l) { return typeof this.dims === "number" ? 1 : Math.log(this.dims[l]); }

  /** The flow network once: arcs in compressed rows; only the two ends of open legs change. */
  build() {
    const S = this.tensors, T = S + 1;
    let nodes = T + 1;
    const from = [], to = [], cap = [], back = [], label = [];
    const add = (a, b, c1, c2, l) => { from.push(a, b); to.push(b, a); cap.push(c1, c2); label.push(l, l); };
    this.open = [];
    for (let l = 0; l < this.holders.length; l++) {
      const ends = [...new Set(this.holders[l])];
      const isOpen = this.siteOf[l] >= 0 || this.isBulk[l];
      const c = this.weight(l);
      if (ends.length + (isOpen ? 1 : 0) < 2) continue;
      if (ends.length === 2 && !isOpen) add(ends[0], ends[1], c, c, l);
      else if (ends.length === 1) { this.open.push([l, from.length]); add(S, ends[0], c, 0, l); add(ends[0], T, 0, 0, l); }
      else {
        const a = nodes++, b = nodes++;
        add(a, b, c, 0, l);
        for (const t of ends) { add(t, a, Infinity, 0, -1); add(b, t, Infinity, 0, -1); }
        if (isOpen) { this.open.push([l, -from.length - 1, a, b]); add(S, a, 0, 0, -1); add(b, T, 0, 0, -1); }
      }
    }
    this.S = S; this.T = T; this.nodes = nodes;
    this.to = Int32Array.from(to); this.base = Float64Array.from(cap); this.label = Int32Array.from(label);
    const first = new Int32Array(nodes + 1);
    from.forEach((a) => { first[a + 1]++; });
    for (let i = 0; i < nodes; i++) first[i + 1] += first[i];
    const next = first.slice();
    this.arcs = new Int32Array(from.length);
    from.forEach((a, i) => { this.arcs[next[a]++] = i; });
    this.first = first;
  }

  /** A minimal cut: its size, its labels, and which tensors stand on the region's side (as many as can). */
  minimalCut(flags) {
    const cap = this.base.slice();
    for (const [l, at] of this.open) {
      const inside = this.siteOf[l] >= 0 && flags[this.siteOf[l]];
      const c = this.weight(l);
      if (at >= 0) { cap[at] = inside ? c : 0; cap[at + 2] = inside ? 0 : c; }
      else { const k = -at - 1; cap[k] = inside ? Infinity : 0; cap[k + 2] = inside ? 0 : Infinity; }
    }
    const { S, T, nodes, to, first, arcs } = this;
    const level = new Int32Array(nodes), queue = new Int32Array(nodes), next = new Int32Array(nodes);
    const path = new Int32Array(nodes);
    let flow = 0;
    for (;;) {
      level.fill(-1); level[S] = 0; queue[0] = S;
      for (let head = 0, tail = 1; head < tail; head++) {
        const a = queue[head];
        for (let i = first[a]; i < first[a + 1]; i++) {
          const e = arcs[i], b = to[e];
          if (cap[e] > 1e-9 && level[b] < 0) { level[b] = level[a] + 1; queue[tail++] = b; }
        }
      }
      if (level[T] < 0) break;
      next.set(first.subarray(0, nodes));
      let depth = 0, at = S;
      for (;;) {
        if (at === T) {
          let least = Infinity;
          for (let k = 0; k < depth; k++) least = Math.min(least, cap[path[k]]);
          flow += least;
          let keep = depth;
          for (let k = depth - 1; k >= 0; k--) { cap[path[k]] -= least; cap[path[k] ^ 1] += least; if (cap[path[k]] <= 1e-9) keep = k; }
          depth = keep; at = depth ? to[path[depth - 1]] : S;
          continue;
        }
        let moved = false;
        for (; next[at] < first[at + 1]; next[at]++) {
          const e = arcs[next[at]], b = to[e];
          if (cap[e] > 1e-9 && level[b] === level[at] + 1) { path[depth++] = e; at = b; moved = true; break; }
        }
        if (!moved) {
          if (at === S) break;
          level[at] = -1; depth--; at = depth ? to[path[depth - 1]] : S; next[at]++;
        }
      }
    }
    // What can still reach the sink lies on its side; everything else is the region's.
    const far = new Uint8Array(nodes); far[T] = 1; queue[0] = T;
    for (let head = 0, tail = 1; head < tail; head++) {
      const a = queue[head];
      for (let i = first[a]; i < first[a + 1]; i++) {
        const e = arcs[i], b = to[e];
        if (cap[e ^ 1] > 1e-9 && !far[b]) { far[b] = 1; queue[tail++] = b; }
      }
    }
    const labels = [];
    const seen = new Set();
    for (let e = 0; e < to.length; e++) {
      const l = this.label[e], b = to[e], a = to[e ^ 1];
      if (l < 0 || far[a] === far[b] || seen.has(l)) continue;
      const site = this.siteOf[l];
      if ((a === S || a === T || b === S || b === T)) {
        const inside = site >= 0 && flags[site];
        const t = a < S ? a : b;
        if ((inside ? 1 : 0) === 1 - far[t]) continue;
      }
      seen.add(l); labels.push(l);
    }
    return { size: flow, labels, near: far.subarray(0, this.tensors).map((f) => 1 - f) };
  }

  /** Whether tensor t is an isometry from the legs that are not known to those that are. */
  absorbs(t, known) {
    const legs = this.legs[t], table = this.tables[this.block[t]];
    let unknown = 0, mask = 0;
    legs.forEach((l, i) => { if (!known[l]) { unknown++; mask |= 1 << i; } });
    if (table === "perfect") return 2 * unknown <= legs.length;
    if (!table) return false;
    return ((parseInt(table[mask >> 2], 16) >> (mask & 3)) & 1) === 1;
  }
  /** Absorbs from the sites where flags is `side`, among tensors not yet taken. */
  sweep(flags, side, taken, mark) {
    const known = new Uint8Array(this.holders.length), queue = [];
    const learn = (l) => {
      if (known[l] || this.ends[l] > 2) return;
      known[l] = 1;
      for (const t of this.holders[l]) if (!taken[t]) queue.push(t);
    };
    this.boundary.forEach((l, s) => { if (flags[s] === side) learn(l); });
    for (let head = 0; head < queue.length; head++) {
      const t = queue[head];
      if (taken[t] || !this.absorbs(t, known)) continue;
      taken[t] = mark;
      this.legs[t].forEach(learn);
    }
  }
  /** Weight of the wires between both sides where nothing is left over: the entropy, exactly. */
  between(side, flags) {
    let sum = 0;
    for (let l = 0; l < this.holders.length; l++) {
      const ends = this.holders[l], site = this.siteOf[l];
      const open = site >= 0 ? (flags[site] ? 1 : 2) : this.isBulk[l] ? 2 : 0;
      if (this.ends[l] + (open ? 1 : 0) > 2) return null;
      const a = side[ends[0]], b = open || side[ends[ends.length - 1]];
      if (a !== b) sum += this.weight(l);
    }
    return sum;
  }
  /** 1 for what the region absorbs, 2 for what its complement does, 0 for the core. */
  closure(flags) {
    let best = null, least = Infinity;
    for (const order of [[1, 0], [0, 1]]) {
      const taken = new Uint8Array(this.tensors);
      for (const side of order) this.sweep(flags, side, taken, side ? 1 : 2);
      const core = taken.reduce((k, m) => k + (m === 0), 0);
      if (core < least) { least = core; best = taken; }
      if (core === 0) break;
    }
    return { side: best, core: least, wires: least === 0 ? this.between(best, flags) : null };
  }
}
const nets = new Map();
function netOf(c) {
  // Cases that share graph, weights and tables share the flow network too.
  const key = `${c.graph}|${JSON.stringify(c.dims)}|${c.tables.join()}`;
  if (!nets.has(key)) nets.set(key, new Net(c));
  return nets.get(key);
}
