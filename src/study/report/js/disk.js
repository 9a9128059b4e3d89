/** The disk: tiles or bonds once in the background, the chosen region on top. */
const css = (name) => getComputedStyle(document.documentElement).getPropertyValue(name).trim();

/** Points of the geodesic of the unit disk from a to b, a left out. */
function geodesic(a, b) {
  // b seen from a, a straight line there, sampled and moved back.
  const [ax, ay] = a, [bx, by] = b;
  const dr = 1 - (ax * bx + ay * by), di = -(ax * by - ay * bx);
  const nr = bx - ax, ni = by - ay, m = dr * dr + di * di;
  if (m < 1e-14) return [b];
  const wx = (nr * dr + ni * di) / m, wy = (ni * dr - nr * di) / m;
  const steps = Math.hypot(nr, ni) < 0.06 ? 1 : 10;
  const out = [];
  const far = Math.atanh(Math.min(Math.hypot(wx, wy), 1 - 1e-12)), len = Math.hypot(wx, wy) || 1;
  for (let k = 1; k <= steps; k++) {
    const r = Math.tanh((far * k) / steps) / len;
    out.push(fromOrigin([wx * r, wy * r], a));
  }
  return out;
}
/** The move of the disk that takes 0 to a, at z. */
function fromOrigin([x, y], [ax, ay]) {
  const nr = x + ax, ni = y + ay, dr = 1 + ax * x + ay * y, di = ax * y - ay * x, m = dr * dr + di * di;
  return [(nr * dr + ni * di) / m, (ni * dr - nr * di) / m];
}
/** The move that takes a to 0, at z. */
const toOrigin = (z, a) => fromOrigin(z, [-a[0], -a[1]]);

class Disk {
  constructor(canvas, choose) {
    this.canvas = canvas;
    this.choose = choose;
    this.under = document.createElement("canvas");
    this.dirty = true;
    new ResizeObserver(() => this.fit()).observe(canvas);
    matchMedia("(prefers-color-scheme: dark)").addEventListener("change", () => this.repaint());
    addEventListener("beforeprint", () => this.repaint());
    addEventListener("afterprint", () => this.repaint());
    this.listen();
  }
  repaint() { this.dirty = true; this.draw(); }
  fit() {
    const ratio = Math.min(devicePixelRatio || 1, 3), size = Math.round(this.canvas.clientWidth * ratio);
    if (!size || size === this.canvas.width) return;
    this.canvas.width = this.canvas.height = size;
    this.dirty = true;
    this.draw();
  }
  show(c, flags) {
    if (this.case !== c) {
      const other = !this.case || this.case.graph !== c.graph;
      this.case = c;
      this.net = netOf(c);
      if (other) { this.place(); this.dirty = true; }
    }
    this.flags = flags;
    this.cut = this.net.minimalCut(flags);
    this.closure = this.net.closure(flags);
    if (!this.pending) this.pending = requestAnimationFrame(() => { this.pending = 0; this.draw(); });
  }
  place() {
    const g = this.case.graphData;
    this.at = [];
    for (let t = 0; t < g.legs.length; t++) this.at.push([g.place[2 * t] / 1e6, g.place[2 * t + 1] / 1e6]);
    this.angle = g.angles.map((a) => a / 1e6);
    this.tiles = g.tiling && g.legs.length > 1 ? this.corners(g) : null;
  }
  /** Sides of every tile, in the order of its legs: [from, to] corners. */
  corners(g) {
    const [p, q] = g.tiling;
    const c = Math.cos(Math.PI / p + Math.PI / q) / Math.cos(Math.PI / p - Math.PI / q);
    const reach = Math.sqrt(Math.max(c, 0));
    return g.legs.map((legs, t) => {
      // States that fix bulk legs are no tiles.
      if (legs.length < p) return null;
      const here = this.at[t];
      let side = -1, to = null;
      legs.slice(0, p).some((l, k) => {
        const other = this.net.holders[l].find((u) => u !== t);
        if (other === undefined) return false;
        side = k; to = other;
        return true;
      });
      if (side < 0) return null;
      const [x, y] = toOrigin(this.at[to], here);
      const turn = Math.atan2(y, x) - (2 * Math.PI * side) / p;
      const corner = (k) => {
        const a = turn + (2 * Math.PI * (k - 0.5)) / p;
        return fromOrigin([reach * Math.cos(a), reach * Math.sin(a)], here);
      };
      const all = Array.from({ length: p }, (_, k) => corner(k));
      return { all, size: Math.hypot(all[0][0] - all[1][0], all[0][1] - all[1][1]) };
    });
  }
  get radius() { return this.canvas.width * (this.case.n <= 80 ? 0.43 : 0.46); }
  at2(p) { const m = this.canvas.width / 2, r = this.radius * 0.965; return [m + p[0] * r, m - p[1] * r]; }
  rim(angle, f = 1) { const m = this.canvas.width / 2, r = this.radius * f; return [m + r * Math.cos(angle), m - r * Math.sin(angle)]; }
  outline(g, tile) {
    g.beginPath();
    let last = tile.all[0];
    g.moveTo(...this.at2(last));
    for (let k = 1; k <= tile.all.length; k++) {
      const next = tile.all[k % tile.all.length];
      for (const z of geodesic(last, next)) g.lineTo(...this.at2(z));
      last = next;
    }
    g.closePath();
  }
  bond(g, a, b) {
    g.moveTo(...this.at2(a));
    if (this.case.graphData.tiling) for (const z of geodesic(a, b)) g.lineTo(...this.at2(z));
    else g.lineTo(...this.at2(b));
  }
  /** Fills that tell region and complement apart without colour: strokes and dots. */
  pattern(g, kind) {
    const k = Math.max(7, Math.round(this.canvas.width / 90)), s = document.createElement("canvas");
    s.width = s.height = k;
    const h = s.getContext("2d");
    h.fillStyle = css(kind === "region" ? "--region-fill" : "--rest-fill"); h.fillRect(0, 0, k, k);
    if (kind === "region") {
      h.strokeStyle = css("--region"); h.globalAlpha = 0.28; h.lineWidth = Math.max(1, k / 9);
      h.beginPath(); h.moveTo(-1, k + 1); h.lineTo(k + 1, -1); h.moveTo(-1, 1); h.lineTo(1, -1); h.moveTo(k - 1, k + 1); h.lineTo(k + 1, k - 1); h.stroke();
    } else {
      h.fillStyle = css("--rest"); h.globalAlpha = 0.45;
      h.beginPath(); h.arc(k / 2, k / 2, Math.max(0.8, k / 11), 0, 7); h.fill();
    }
    return g.createPattern(s, "repeat");
  }
  background() {
    const size = this.canvas.width, px = size / 640;
    this.under.width = this.under.height = size;
    const g = this.under.getContext("2d");
    g.lineJoin = g.lineCap = "round";
    g.beginPath(); g.arc(size / 2, size / 2, this.radius, 0, 2 * Math.PI);
    g.fillStyle = css("--sheet"); g.fill();
    g.strokeStyle = css("--hair"); g.lineWidth = px; g.stroke();
    if (this.tiles) {
      g.strokeStyle = css("--hair"); g.lineWidth = Math.max(0.5, px);
      g.fillStyle = css("--tile");
      for (const tile of this.tiles) {
        if (!tile || tile.size * this.radius < 1.2) continue;
        this.outline(g, tile); g.fill(); g.stroke();
      }
    }
    this.dirty = false;
  }
  ribs(g) {
    const px = this.canvas.width / 640, few = this.at.length <= 400;
    const net = this.net, holders = net.holders;
    const trace = () => {
      g.beginPath();
      for (let l = 0; l < holders.length; l++) {
        const ends = holders[l];
        if (ends.length < 2 || net.siteOf[l] >= 0) continue;
        const a = this.at[ends[0]], b = this.at[ends[1]];
        if (!few && Math.hypot(a[0] - b[0], a[1] - b[1]) * this.radius < 4) continue;
        if (ends.length === 2) this.bond(g, a, b);
        else {
          const m = ends.reduce((s, t) => [s[0] + this.at[t][0] / ends.length, s[1] + this.at[t][1] / ends.length], [0, 0]);
          for (const t of ends) this.bond(g, m, this.at[t]);
        }
      }
    };
    trace(); g.strokeStyle = css("--rib"); g.lineWidth = (few ? 5 : 1.4) * px; g.stroke();
    if (few) { trace(); g.strokeStyle = css("--rib-core"); g.lineWidth = 2.2 * px; g.stroke(); }
  }
  draw() {
    if (!this.flags || !this.canvas.width) return;
    if (this.dirty) this.background();
    const g = this.canvas.getContext("2d"), size = this.canvas.width, px = size / 640, net = this.net;
    const { side } = this.closure, cut = new Set(this.cut.labels);
    g.clearRect(0, 0, size, size);
    g.drawImage(this.under, 0, 0);
    g.lineJoin = g.lineCap = "round";
    const blue = this.pattern(g, "region"), ochre = this.pattern(g, "rest"), paper = css("--sheet");
    if (this.tiles) {
      g.strokeStyle = css("--hair"); g.lineWidth = Math.max(0.5, px);
      this.tiles.forEach((tile, t) => {
        if (!tile || tile.size * this.radius < 0.8) return;
        this.outline(g, tile);
        g.fillStyle = side[t] === 1 ? blue : side[t] === 2 ? ochre : paper;
        g.fill(); g.stroke();
      });
    }
    const dense = this.at.length > 400;
    if (this.tiles) { this.margin(g, blue, 1); this.margin(g, ochre, 0); }
    this.ribs(g);
    // Legs to the rim.
    const n = this.case.n, few = n <= 400;
    if (few) for (const pass of [0, 1]) {
      g.beginPath();
      net.boundary.forEach((l, s) => {
        if ((this.flags[s] ? 1 : 0) !== pass) return;
        for (const t of net.holders[l]) { g.moveTo(...this.at2(this.at[t])); g.lineTo(...this.rim(this.angle[s])); }
      });
      g.strokeStyle = css(pass ? "--region" : "--rib"); g.lineWidth = (pass ? 2.6 : 1.8) * px; g.stroke();
    }
    // The cut: the sides of tiles that it runs along, or a stroke across each bond.
    for (const [colour, width] of [[css("--sheet"), 8], [css("--cut"), 4.5]]) {
      g.beginPath();
      for (const l of cut) this.crossing(g, l, px);
      if (this.tiles) this.landings(g);
      g.strokeStyle = colour; g.lineWidth = (dense ? width * 0.7 : width) * px; g.stroke();
    }
    if (!dense) {
      const r = Math.max(2.5, Math.min(9, 60 / Math.sqrt(this.at.length))) * px;
      this.at.forEach((p, t) => {
        g.beginPath(); g.arc(...this.at2(p), r * (this.tiles ? Math.max(0.45, 1 - 0.6 * Math.hypot(...p)) * 1.25 : 1), 0, 2 * Math.PI);
        g.fillStyle = css(side[t] === 1 ? "--region" : side[t] === 2 ? "--rest" : "--sheet");
        g.fill();
        g.strokeStyle = css(side[t] === 0 ? "--ink" : "--sheet");
        g.lineWidth = 1.5 * px; g.stroke();
      });
    }
    if (!dense) {
      // A bulk leg: a small square inside its tensor's boss.
      const b = Math.max(1.6, Math.min(4, 26 / Math.sqrt(this.at.length))) * px;
      for (const l of this.case.graphData.bulk) for (const t of net.holders[l]) {
        const [x, y] = this.at2(this.at[t]);
        g.fillStyle = css("--sheet"); g.fillRect(x - b, y - b, 2 * b, 2 * b);
        g.strokeStyle = css("--ink"); g.lineWidth = px; g.strokeRect(x - b, y - b, 2 * b, 2 * b);
      }
    }
    this.sites(g, px, n);
  }
  /** The angle between site s and the next. */
  between(s) {
    const n = this.case.n, a = this.angle[s];
    return (a + (s + 1 < n ? this.angle[s + 1] : this.angle[0] + 2 * Math.PI)) / 2;
  }
  /** Both corners of the open side that site s leaves through, clockwise one first. */
  side(s) {
    const l = this.net.boundary[s], t = this.net.holders[l][0], tile = this.tiles[t];
    const k = this.net.legs[t].indexOf(l);
    return tile && k < tile.all.length ? [tile.all[k], tile.all[(k + 1) % tile.all.length]] : null;
  }
  /** The strip between the tiles and the rim, where it belongs to the region (1) or the rest (0). */
  margin(g, fill, of) {
    const n = this.case.n;
    g.beginPath();
    for (let s = 0; s < n; s++) {
      const ends = (this.flags[s] ? 1 : 0) === of && this.side(s);
      if (!ends || Math.hypot(ends[0][0] - ends[1][0], ends[0][1] - ends[1][1]) * this.radius < 0.8) continue;
      const m = this.canvas.width / 2, from = this.between((s + n - 1) % n), to = this.between(s);
      g.moveTo(...this.at2(ends[0]));
      for (const z of geodesic(ends[0], ends[1])) g.lineTo(...this.at2(z));
      g.arc(m, m, this.radius, -to, -from, false);
      g.closePath();
    }
    g.fillStyle = fill; g.fill();
    g.strokeStyle = fill; g.lineWidth = 1; g.stroke();
  }
  /** Where the cut runs from the tiles to the rim: at the ends of the region. */
  landings(g) {
    const n = this.case.n;
    for (let s = 0; s < n; s++) {
      if (this.flags[s] === this.flags[(s + 1) % n]) continue;
      const ends = this.side(s);
      if (!ends) continue;
      g.moveTo(...this.at2(ends[1]));
      g.lineTo(...this.rim(this.between(s)));
    }
  }
  crossing(g, l, px) {
    const net = this.net, ends = net.holders[l];
    if (this.tiles) {
      for (const t of ends) {
        const k = net.legs[t].indexOf(l), tile = this.tiles[t];
        if (!tile || k >= tile.all.length) continue;
        const a = tile.all[k], b = tile.all[(k + 1) % tile.all.length];
        g.moveTo(...this.at2(a));
        for (const z of geodesic(a, b)) g.lineTo(...this.at2(z));
        return;
      }
    }
    const s = net.siteOf[l];
    const [x1, y1] = this.at2(this.at[ends[0]]);
    const [x2, y2] = s >= 0 ? this.rim(this.angle[s]) : this.at2(this.at[ends[ends.length - 1]]);
    const len = Math.hypot(x2 - x1, y2 - y1) || 1, r = 13 * px;
    const mx = (x1 + x2) / 2, my = (y1 + y2) / 2, ux = (-(y2 - y1) / len) * r, uy = ((x2 - x1) / len) * r;
    g.moveTo(mx - ux, my - uy); g.lineTo(mx + ux, my + uy);
  }
  sites(g, px, n) {
    const gap = (k) => {
      const a = this.angle[k], b = k + 1 < n ? this.angle[k + 1] : this.angle[0] + 2 * Math.PI;
      return [a, b];
    };
    const m = this.canvas.width / 2;
    // The region as an arc of the rim: from half a gap before each site to half a gap after.
    g.lineCap = "butt";
    for (let s = 0; s < n; s++) {
      if (!this.flags[s] || this.flags[(s + n - 1) % n] && s > 0) continue;
      let e = s;
      while (e + 1 < n && this.flags[e + 1]) e++;
      const before = s > 0 ? gap(s - 1)[0] : this.angle[n - 1] - 2 * Math.PI;
      const start = (before + this.angle[s]) / 2, end = (gap(e)[0] + gap(e)[1]) / 2;
      g.beginPath(); g.arc(m, m, this.radius, -start, -end, true);
      g.strokeStyle = css("--region"); g.lineWidth = 5 * px; g.stroke();
    }
    g.lineCap = "round";
    if (n > 400) return;
    const r = Math.max(1.6, Math.min(6.5, 420 / n)) * px;
    for (let s = 0; s < n; s++) {
      g.beginPath(); g.arc(...this.rim(this.angle[s]), this.flags[s] ? r * 1.15 : r, 0, 2 * Math.PI);
      g.fillStyle = this.flags[s] ? css("--region") : css("--sheet"); g.fill();
      g.strokeStyle = this.flags[s] ? css("--sheet") : css("--boss"); g.lineWidth = 1.4 * px; g.stroke();
    }
    const every = n <= 40 ? 1 : n <= 120 ? 5 : n <= 400 ? 20 : n;
    if (n > 120) return;
    g.font = `${Math.round(13 * px)}px ${css("--sans")}`;
    g.textAlign = "center"; g.textBaseline = "middle";
    for (let s = 0; s < n; s += every) {
      g.fillStyle = css(this.flags[s] ? "--region" : "--soft");
      g.fillText(String(s), ...this.rim(this.angle[s], 1.075));
    }
  }
  nearest(event) {
    const box = this.canvas.getBoundingClientRect();
    const x = event.clientX - box.left - box.width / 2, y = box.top + box.height / 2 - event.clientY;
    if (Math.hypot(x, y) < box.width * 0.12) return -1;
    const turn = 2 * Math.PI, list = this.angle, n = list.length;
    const a = list[0] + ((((Math.atan2(y, x) - list[0]) % turn) + turn) % turn);
    let lo = 0, hi = n;
    while (lo < hi) { const mid = (lo + hi) >> 1; if (list[mid] < a) lo = mid + 1; else hi = mid; }
    const after = lo < n ? list[lo] : list[0] + turn, before = list[lo - 1] ?? list[0];
    return after - a < a - before ? lo % n : lo - 1;
  }
  listen() {
    let from = -1, last = -1, moved = 0;
    const at = (event) => {
      const s = this.nearest(event), n = this.case.n;
      if (s < 0 || s === last) return;
      moved += ((((s - last + n / 2) % n) + n) % n) - n / 2;
      moved = Math.max(-(n - 1), Math.min(n - 1, Math.round(moved)));
      last = s;
      const length = Math.min(Math.abs(moved) + 1, Math.max(1, n - 1));
      this.choose(moved >= 0 ? from : (((from - length + 1) % n) + n) % n, length);
    };
    this.canvas.addEventListener("pointerdown", (event) => {
      const s = this.nearest(event);
      if (s < 0) return;
      from = last = s; moved = 0;
      this.canvas.setPointerCapture(event.pointerId);
      this.choose(s, 1);
    });
    // At most one step a frame, however many moves come.
    let waiting = null;
    const step = () => { const event = waiting; waiting = null; if (event && from >= 0) at(event); };
    this.canvas.addEventListener("pointermove", (event) => {
      if (from < 0) return;
      if (!waiting) requestAnimationFrame(step);
      waiting = event;
    });
    for (const end of ["pointerup", "pointercancel"]) this.canvas.addEventListener(end, () => { step(); from = -1; });
  }
}
