/** Charts as SVG, in the page's colours; every series has its own mark and dash too. */
const DASH = ["", "7 3", "2 3", "9 3 2 3", "12 4", "1 4"];
const svgNode = (name, attributes = {}, ...children) => {
  const node = document.createElementNS("http://www.w3.org/2000/svg", name);
  for (const [k, v] of Object.entries(attributes)) node.setAttribute(k, v);
  node.append(...children);
  return node;
};
const colour = (i) => `var(--k${i % 6})`;
function mark(i, x, y, r) {
  const p = { stroke: colour(i), "stroke-width": 1.6, fill: i % 2 ? "var(--sheet)" : colour(i) };
  const path = (d) => svgNode("path", { d, ...p });
  switch (i % 6) {
    case 0: return svgNode("circle", { cx: x, cy: y, r, ...p });
    case 1: return svgNode("rect", { x: x - r, y: y - r, width: 2 * r, height: 2 * r, ...p });
    case 2: return path(`M${x} ${y - 1.3 * r}L${x + 1.2 * r} ${y + r}H${x - 1.2 * r}Z`);
    case 3: return path(`M${x} ${y - 1.4 * r}L${x + 1.4 * r} ${y}L${x} ${y + 1.4 * r}L${x - 1.4 * r} ${y}Z`);
    case 4: return path(`M${x} ${y + 1.3 * r}L${x + 1.2 * r} ${y - r}H${x - 1.2 * r}Z`);
    default: return path(`M${x - r} ${y - r}L${x + r} ${y + r}M${x - r} ${y + r}L${x + r} ${y - r}`);
  }
}
/** Round steps that cover 0…top with about `count` lines. */
function steps(top, count) {
  const raw = Math.max(top, 1e-9) / count, power = 10 ** Math.floor(Math.log10(raw));
  const step = [1, 2, 5, 10].map((m) => m * power).find((s) => s >= raw);
  const out = [];
  for (let v = 0; v <= top + step * 1e-6; v += step) out.push(Math.round(v / step) * step);
  return out;
}
const trim = (v) => String(Math.round(v * 1e6) / 1e6);

function axes(svg, box, xs, ys, x, y, xTitle, yTitle) {
  for (const v of ys) {
    svg.append(svgNode("path", { class: "grid", d: `M${box.left} ${y(v)}H${box.right}` }));
    const t = svgNode("text", { x: box.left - 8, y: y(v) + 4.5, "text-anchor": "end" }); t.textContent = trim(v); svg.append(t);
  }
  for (const v of xs) {
    svg.append(svgNode("path", { class: "axis", d: `M${x(v)} ${box.bottom}v5` }));
    const t = svgNode("text", { x: x(v), y: box.bottom + 20, "text-anchor": "middle" }); t.textContent = trim(v); svg.append(t);
  }
  svg.append(svgNode("path", { class: "axis", d: `M${box.left} ${box.top}V${box.bottom}H${box.right}` }));
  const xt = svgNode("text", { x: (box.left + box.right) / 2, y: box.bottom + 42, "text-anchor": "middle", class: "faint" }); xt.textContent = xTitle;
  const yt = svgNode("text", { x: box.left - 8, y: box.top - 12, "text-anchor": "start", class: "faint" }); yt.textContent = yTitle;
  yt.setAttribute("x", 6);
  svg.append(xt, yt);
}

class LengthChart {
  constructor(figure, choose) {
    const series = CASES.map((c, i) => ({ c, i })).filter(({ c }) => c.lengths.length > 1);
    if (!series.length) { figure.closest("section").hidden = true; return; }
    const wide = 880, high = 400, box = { left: 56, right: 700, top: 40, bottom: 340 };
    const longest = Math.max(...series.map(({ c }) => c.lengths[c.lengths.length - 1][0]));
    const top = Math.max(...series.flatMap(({ c }) => c.lengths.map((l) => c.inUnits(l[4]))));
    this.x = (l) => box.left + ((box.right - box.left) * l) / longest;
    const y = (s) => box.bottom - ((box.bottom - box.top) * s) / (top * 1.04 || 1);
    const svg = svgNode("svg", { viewBox: `0 0 ${wide} ${high}`, role: "img", "aria-label": `Mean entropy against interval length for ${series.length} cases; the values are in by_length.csv` });
    axes(svg, box, steps(longest, 8).filter((v) => Number.isInteger(v)), steps(top, 6), this.x, y, "length of the interval, in sites", `mean entropy, in ${UNIT}`);
    const labels = [];
    for (const { c, i } of series) {
      const at = c.lengths.map((l) => [this.x(l[0]), y(c.inUnits(l[1]))]);
      if (c.fit) {
        const d = c.lengths.map(([l]) => {
          const s = (c.fit.central_charge / 3) * Math.log((c.n / Math.PI) * Math.sin((Math.PI * l) / c.n)) + c.fit.constant_nats;
          return `${this.x(l).toFixed(1)} ${y(c.inUnits(s)).toFixed(1)}`;
        });
        svg.append(svgNode("path", { d: `M${d.join("L")}`, fill: "none", stroke: colour(i), "stroke-width": 1.1, "stroke-dasharray": DASH[i % 6] || "none", opacity: 0.85 }));
      }
      const thin = Math.ceil(at.length / 60), shift = (i - (series.length - 1) / 2) * Math.min(4, 0.16 * (this.x(1) - this.x(0)));
      at.forEach((p, k) => { if (k % thin === 0) svg.append(mark(i, p[0] + shift, p[1], 4.2)); });
      const mid = at[Math.floor(at.length / 2)];
      labels.push({ i, c, y: mid[1] });
    }
    this.line = svgNode("path", { class: "here", d: "" });
    svg.append(this.line);
    labels.forEach((l, k) => {
      const ly = box.top + 12 + k * 24;
      svg.append(svgNode("path", { d: `M${box.right + 18} ${ly}h26`, stroke: colour(l.i), "stroke-width": 1.2, "stroke-dasharray": DASH[l.i % 6] || "none" }), mark(l.i, box.right + 31, ly, 4.5));
      const t = svgNode("text", { x: box.right + 52, y: ly + 4.5 }); t.textContent = l.c.case; svg.append(t);
    });
    this.box = box;
    svg.style.cursor = "pointer";
    svg.addEventListener("click", (event) => {
      const r = svg.getBoundingClientRect();
      const at = ((event.clientX - r.left) / r.width) * wide;
      choose(Math.round(((at - box.left) / (box.right - box.left)) * longest));
    });
    figure.append(svg);
    const head = el("fit-table").tHead, body = el("fit-table").tBodies[0];
    const fitted = series.filter(({ c }) => c.fit);
    if (!fitted.length) { el("fit-table").hidden = true; return; }
    head.innerHTML = `<tr><th scope="col">case</th><th scope="col" class="n">c</th><th scope="col" class="n">± standard error</th><th scope="col" class="n">c / ln D</th><th scope="col" class="n">s₀ (nats)</th><th scope="col" class="n">deviation (nats)</th></tr>`;
    for (const { c } of fitted) row(body, [c.case, num(c.fit.central_charge, 4), num(c.fit.central_charge_error, 4), c.legDimension ? num(c.fit.central_charge / Math.log(c.legDimension), 4) : "–", num(c.fit.constant_nats, 4), num(c.fit.deviation_nats, 4)]);
  }
  show(length) { if (this.line) this.line.setAttribute("d", `M${this.x(length)} ${this.box.top}V${this.box.bottom}`); }
}

/** Distances below the cut, one strip a case: a bar for each distance that occurs, counted in words. */
function gapChart(figure) {
  const strips = CASES.map((c, i) => {
    const counts = new Map();
    let open = 0, all = 0;
    for (const o of c.others) {
      const v = c.values[o[3]];
      all++;
      if (v[2] === null) { open++; continue; }
      const gap = Math.max(0, Math.round(c.inUnits(v[1] - v[2]) * 1e5) / 1e5);
      counts.set(gap, (counts.get(gap) || 0) + 1);
    }
    return { c, i, all, open, counts: [...counts].sort((a, b) => a[0] - b[0]) };
  }).filter((s) => s.all);
  if (!strips.length || strips.every((s) => s.counts.every(([g]) => g === 0))) { figure.closest("section").hidden = true; return; }
  const strip = 92, wide = 880, left = 120, right = 850, high = strips.length * strip + 62;
  const top = Math.max(...strips.flatMap((s) => s.counts.map(([g]) => g)), 1e-6);
  const most = Math.max(...strips.flatMap((s) => s.counts.map(([, k]) => k)));
  const x = (g) => left + 24 + ((right - left - 48) * g) / top;
  const svg = svgNode("svg", { viewBox: `0 0 ${wide} ${high}`, role: "img", "aria-label": "Counts of regions by distance below the minimal cut, one strip a case" });
  strips.forEach((s, k) => {
    const base = 30 + k * strip + 56;
    svg.append(svgNode("path", { class: "axis", d: `M${left} ${base}H${right}` }));
    const name = svgNode("text", { x: 6, y: base - 8 }); name.textContent = s.c.case; svg.append(name);
    if (s.open) { const t = svgNode("text", { x: 6, y: base + 10, class: "faint" }); t.textContent = `${s.open} open`; svg.append(t); }
    let lastAt = -99, high2 = 0;
    for (const [g, count] of s.counts) {
      const h = Math.max(3, 44 * Math.sqrt(count / most)), at = x(g);
      svg.append(svgNode("rect", { x: at - 5, y: base - h, width: 10, height: h, fill: colour(s.i), rx: 1.5 }));
      high2 = at - lastAt < 30 ? (high2 + 1) % 2 : 0;
      const t = svgNode("text", { x: at, y: base - h - 5 - 13 * high2, "text-anchor": "middle" }); t.textContent = count; svg.append(t);
      lastAt = at;
    }
  });
  const base = strips.length * strip + 2;
  for (const v of steps(top, 7)) {
    svg.append(svgNode("path", { class: "axis", d: `M${x(v)} ${base}v5` }));
    const t = svgNode("text", { x: x(v), y: base + 20, "text-anchor": "middle" }); t.textContent = trim(v); svg.append(t);
  }
  const title = svgNode("text", { x: (left + right) / 2, y: base + 42, "text-anchor": "middle", class: "faint" });
  title.textContent = `minimal cut less entropy, in ${UNIT}`;
  svg.append(title);
  figure.append(svg);
}

/** Shares of the evidence, one bar a case; each kind has its own pattern. */
function evidenceChart(figure) {
  const wide = 880, rowHigh = 34, left = 120, right = 850, high = CASES.length * rowHigh + 46;
  const svg = svgNode("svg", { viewBox: `0 0 ${wide} ${high}`, role: "img", "aria-label": "Shares of the kinds of evidence in each case; the counts are in the table below" });
  const defs = svgNode("defs");
  const pattern = (id, bg, fg, d) => {
    const p = svgNode("pattern", { id, width: 8, height: 8, patternUnits: "userSpaceOnUse" }, svgNode("rect", { width: 8, height: 8, fill: bg }));
    if (d) p.append(svgNode("path", { d, stroke: fg, "stroke-width": 1.6, fill: "none" }));
    defs.append(p);
  };
  pattern("e0", "var(--k0)", "", "");
  pattern("e1", "var(--region-fill)", "var(--k0)", "M-2 2 2-2M0 8 8 0M6 10 10 6");
  pattern("e2", "var(--k2)", "var(--sheet)", "M4 0V8");
  pattern("e3", "var(--sheet)", "var(--k4)", "M0 4H8M4 0V8");
  pattern("e4", "var(--sheet)", "var(--cut)", "M0 2H8M0 6H8");
  svg.append(defs);
  CASES.forEach((c, k) => {
    const y = 10 + k * rowHigh, total = EVIDENCE.reduce((s, e) => s + countOf(c, e), 0);
    const name = svgNode("text", { x: 6, y: y + 17 }); name.textContent = c.case; svg.append(name);
    let at = left;
    EVIDENCE.forEach((e, i) => {
      const w = ((right - left) * countOf(c, e)) / (total || 1);
      if (w > 0) svg.append(svgNode("rect", { x: at, y, width: w, height: 22, fill: `url(#e${i})`, stroke: "var(--sheet)", "stroke-width": 1.5 }));
      at += w;
    });
  });
  let at = left;
  EVIDENCE.forEach((e, i) => {
    if (!CASES.some((c) => countOf(c, e))) return;
    svg.append(svgNode("rect", { x: at, y: high - 26, width: 18, height: 14, fill: `url(#e${i})`, stroke: "var(--boss)" }));
    const t = svgNode("text", { x: at + 25, y: high - 14 }); t.textContent = `${e.sign} ${e.word}`; svg.append(t);
    at += 60 + 8.5 * e.word.length;
  });
  figure.append(svg);
}
const countOf = (c, e) => c.counts.evidence[e.word.replace(" ", "-")] || 0;
