/** Codes and orders: what a study found besides entropies. */
function findings(kind) {
  return CASES.flatMap((c, i) => (c.findings || []).filter((f) => f.question === kind).map((f) => ({ c, i, f })));
}
const few = (list) => (list.length ? (list.length > 12 ? `${list.slice(0, 12).join(", ")} … (${list.length})` : list.join(", ")) : "none");

function codeSection() {
  const iso = findings("isometry"), dist = findings("distance"), rec = findings("recovery"), era = findings("erasure"), none = findings("none");
  if (![iso, dist, rec, era, none].some((l) => l.length)) { el("codes").hidden = true; return; }
  const list = el("code-says");
  const say = (text) => { const li = document.createElement("li"); li.textContent = text; list.append(li); };
  for (const { c, f } of iso) {
    const yes = f.isometry === true ? "an isometry" : f.isometry === false ? "no isometry" : "not decided to be an isometry";
    say(`${c.case}: ${f.bulk} bulk legs in ${f.boundary} boundary legs, rate ${f.rate.toFixed(4)}; the map from bulk to boundary is ${yes} (${f.evidence.replace("-", " ")}).` + (f.blamed.length ? ` Bulk legs to blame: ${few(f.blamed)}.` : ""));
  }
  for (const { c, f } of dist) {
    say(`${c.case}: distance ${f.distance !== null ? f.distance : `between ${f.lower} and ${f.upper}`}` + (f.minimal_supports !== null ? `, with ${f.minimal_supports} smallest sets of boundary legs that hurt.` : "."));
  }
  for (const { c, f } of none) say(`${c.case}, ${f.asked}: no answer; ${f.why}.`);
  const table = el("recovery-table");
  if (rec.length) {
    head(table, ["case", "region", "recoverable", "from the complement", "from neither", "evidence"]);
    for (const { c, f } of rec) row(table.tBodies[0], [c.case, f.region, few(f.recoverable), few(f.from_complement), few(f.neither.concat(f.undecided.map((u) => `${u}?`))), f.evidence.replace("-", " ")]).cells[1].className = "";
  } else table.hidden = true;
  if (era.length) erasureChart(el("erasure-chart"), era);
  else el("erasure-chart").hidden = true;
}

function erasureChart(figure, list) {
  const wide = 880, high = 400, box = { left: 56, right: 640, top: 40, bottom: 340 };
  const top = Math.max(...list.flatMap(({ f }) => f.points.map((p) => p.p)));
  const x = (p) => box.left + ((box.right - box.left) * p) / top, y = (v) => box.bottom - (box.bottom - box.top) * v;
  const svg = svgNode("svg", { viewBox: `0 0 ${wide} ${high}`, role: "img", "aria-label": "Probability that recovery fails against erasure rate; the values are in erasure.csv" });
  axes(svg, box, steps(top, 8), [0, 0.2, 0.4, 0.6, 0.8, 1], x, y, "erasure rate of each boundary leg", "probability of failure");
  list.forEach(({ c, i, f }, k) => {
    const put = (of, low, highEnd, dashed, name, ly) => {
      const at = f.points.filter((p) => p[of] !== null).map((p) => [x(p.p), y(p[of]), y(p[low]), y(p[highEnd])]);
      if (!at.length) return;
      svg.append(svgNode("path", { d: `M${at.map((p) => `${p[0].toFixed(1)} ${p[1].toFixed(1)}`).join("L")}`, fill: "none", stroke: colour(i), "stroke-width": 1.4, "stroke-dasharray": dashed ? "5 3" : "none" }));
      for (const p of at) svg.append(svgNode("path", { d: `M${p[0]} ${p[2]}V${p[3]}`, stroke: colour(i), "stroke-width": 1.2 }), mark(i, p[0], p[1], dashed ? 3 : 4));
      svg.append(svgNode("path", { d: `M${box.right + 14} ${ly}h28`, stroke: colour(i), "stroke-width": 1.4, "stroke-dasharray": dashed ? "5 3" : "none" }), mark(i, box.right + 28, ly, 4));
      const t = svgNode("text", { x: box.right + 48, y: ly + 4.5 }); t.textContent = name; svg.append(t);
    };
    put("exact_failure", "exact_low", "exact_high", false, `${c.case}, exact`, box.top + 12 + 48 * k);
    put("greedy_failure", "greedy_low", "greedy_high", true, `${c.case}, greedy`, box.top + 36 + 48 * k);
  });
  figure.append(svg);
}

function orderSection() {
  const list = findings("order");
  if (!list.length) { el("orders").hidden = true; return; }
  const table = el("order-table");
  head(table, ["case", "method", "#seed", "#log₁₀ multiply-adds", "#log₂ peak elements", "#log₂ largest tensor", "#widest step", "#no order below"]);
  for (const { c, f } of list) {
    const tr = row(table.tBodies[0], [c.case, f.optimal ? `${f.method}, proven best` : f.method, String(f.seed), f.log10_multiply_adds.toFixed(3), f.log2_peak_elements.toFixed(2), f.log2_largest_tensor.toFixed(2), String(f.widest_step), String(f.widest_step_bound)]);
    for (let k = 2; k < 8; k++) tr.cells[k].className = "n";
  }
}

/** The spectrum of the chosen region, where the study kept it. */
function showSpectrum(a) {
  const box = el("spectrum");
  box.textContent = "";
  box.hidden = !a || !a.spectrum;
  if (box.hidden) return;
  const levels = a.spectrum, n = levels.reduce((s, l) => s + l[1], 0);
  const words = levels.slice(0, 8).map(([p, m]) => `${m} × ${p.toPrecision(5)}`).join(", ");
  box.textContent = levels.length === 1 ? `Spectrum: flat, ${n} equal values.` : `Spectrum: ${n} values, ${levels.length} of them different: ${words}${levels.length > 8 ? ", …" : ""}.`;
}
