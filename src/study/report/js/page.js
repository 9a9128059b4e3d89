/** The page: what is chosen, and everything that follows it. */
const state = { c: CASES[0], flags: null };
el("name").textContent = DATA.name;
document.querySelectorAll(".unit-word").forEach((n) => { n.textContent = UNIT; });
el("unit").textContent = UNIT;
if (DATA.answered < DATA.asked) {
  el("unfinished").hidden = false;
  el("unfinished").textContent = `This run is not finished: ${DATA.answered} of ${DATA.asked} answers are here. The same command goes on from there.`;
}

const disk = new Disk(el("disk"), (start, length) => chooseInterval(start, length));
const table = new RegionTable(chooseText);
const chart = new LengthChart(el("length-chart"), (length) => {
  const at = interval(state.flags);
  chooseInterval(at ? at[0] : 0, Math.max(1, Math.min(state.c.n - 1, length)));
});
gapChart(el("gap-chart"));
evidenceChart(el("evidence-chart"));
codeSection();
orderSection();
evidenceTable();
blockTable();
provenance();

CASES.forEach((c, i) => {
  const label = document.createElement("label"), input = document.createElement("input");
  input.type = "radio"; input.name = "case"; input.value = i; input.checked = i === 0;
  input.addEventListener("change", () => chooseCase(i));
  label.append(input, c.case);
  el("cases").append(label);
});

function chooseCase(i) {
  if (CASES[i].n === 0) return;
  const before = state.c;
  state.c = CASES[i];
  if (before.n !== state.c.n) state.flags = first(state.c);
  limits();
  update();
}
function chooseInterval(start, length) {
  state.flags = intervalFlags(start, length, state.c.n);
  update();
}
function chooseText(text) {
  const flags = read(text, state.c.n);
  if (typeof flags === "string") { el("region-wrong").textContent = flags; return; }
  state.flags = flags;
  update();
  const top = el("explore").getBoundingClientRect();
  if (top.bottom < 0 || top.top < -innerHeight / 2) el("explore").scrollIntoView({ block: "start" });
}
function first(c) { return intervalFlags(0, Math.max(1, Math.round(c.n / 3)), c.n); }
function limits() {
  el("start").max = state.c.n - 1;
  el("length").max = Math.max(1, state.c.n - 1);
}

function evidenceSays(c, a) {
  if (a.how) return a.how;
  let text = EVIDENCE[a.evidence].says;
  if (a.core) text += ` Core: ${a.core} tensors.`;
  if (a.evidence === 4 && a.price !== null) text += ` The exact answer would cost about ${ten(a.price)} multiply-adds.`;
  else if (a.price !== null && a.price > 0) text += ` Cost: ${ten(a.price)} multiply-adds.`;
  return text;
}

function update() {
  const { c, flags } = state;
  disk.show(c, flags);
  const text = shown(flags), one = interval(flags);
  let a = c.answer(flags);
  // A region that the study did not ask about: where closure leaves nothing over, it is the
  // proof, and the page has it.
  if (!a && disk.closure.wires !== null && Math.abs(disk.closure.wires - disk.cut.size) < 1e-9) {
    const s = typeof c.dims === "number" ? disk.closure.wires : disk.closure.wires / c.unit;
    a = { cutLegs: disk.cut.labels.length, cut: s, entropy: s, lower: s, upper: s, evidence: 0, error: 0, core: 0, price: null, how: "Not asked by the study; found by this page: absorbing tensors from both sides leaves nothing over, so that the cut is exact." };
  }
  const sites = flags.reduce((s, f) => s + f, 0);
  if (document.activeElement !== el("region") || el("region").dataset.typed !== "1") el("region").value = text;
  el("region-wrong").textContent = "";
  if (one) { el("start").value = one[0]; el("length").value = one[1]; }
  el("start-shown").value = one ? one[0] : "–";
  el("length-shown").value = one ? one[1] : "–";
  el("start").setAttribute("aria-valuetext", one ? `site ${one[0]}` : "the region is a union");
  el("length").setAttribute("aria-valuetext", one ? `${one[1]} sites` : "the region is a union");
  const cut = a ? a.cut : typeof c.dims === "number" ? disk.cut.size : disk.cut.size / c.unit;
  el("cut").textContent = `${num(cut)} ${UNIT}` + (a && a.cutLegs !== cut ? `, ${a.cutLegs} legs crossed` : "");
  const big = el("entropy");
  big.textContent = a ? entropyText(a) : "not asked";
  big.classList.toggle("wide", !a || a.entropy === null);
  const below = a ? a.cut - a.upper : 0;
  el("gap").textContent = !a ? `at most the cut, ${num(cut)}` : a.entropy !== null && Math.abs(below) < 1e-9 ? "meets it" : below > 1e-9 ? `${num(below)} below${a.entropy === null ? " at least" : ""}` : "may meet it";
  el("evidence").textContent = a ? `${EVIDENCE[a.evidence].sign} ${EVIDENCE[a.evidence].word}` + (a.error > 0 ? `, error ${a.error.toExponential(0)}` : "") : "none in this study";
  const counts = [0, 0, 0];
  disk.closure.side.forEach((s) => { counts[s]++; });
  el("wedge").textContent = `${counts[1]} tensors from the region, ${counts[2]} from the complement, ${counts[0]} in the core`;
  el("why").textContent = a ? evidenceSays(c, a) : "This study did not ask about this region. The cut found here bounds its entropy from above.";
  showSpectrum(a);
  const body = el("across").tBodies[0];
  body.textContent = "";
  CASES.forEach((o) => {
    const oa = o.n === c.n ? o.answer(flags) : null;
    const tr = row(body, [o.case, oa ? num(oa.cut) : "–", entropyText(oa), oa ? `${EVIDENCE[oa.evidence].sign} ${EVIDENCE[oa.evidence].word}` : "–"]);
    tr.cells[1].className = tr.cells[2].className = "n";
    if (o === c) tr.className = "on";
  });
  el("across").hidden = CASES.length < 2;
  table.mark(text);
  if (one) chart.show(one[1]);
  clearTimeout(update.wait);
  update.wait = setTimeout(() => {
    el("said").textContent = `Region ${text}, ${sites} sites, ${c.case}: entropy ${big.textContent} ${UNIT}, minimal cut ${num(cut)}, ${a ? EVIDENCE[a.evidence].word : "not asked"}.`;
  }, 250);
}

el("region").addEventListener("input", () => {
  el("region").dataset.typed = "1";
  const flags = read(el("region").value, state.c.n);
  if (typeof flags === "string") { el("region-wrong").textContent = flags; return; }
  if (!flags.some((f) => f)) { el("region-wrong").textContent = "no site chosen"; return; }
  state.flags = flags;
  update();
});
el("region").addEventListener("blur", () => { el("region").dataset.typed = ""; el("region").value = shown(state.flags); el("region-wrong").textContent = ""; });
for (const id of ["start", "length"]) el(id).addEventListener("input", () => chooseInterval(Number(el("start").value), Number(el("length").value)));
el("disk").addEventListener("keydown", (event) => {
  const n = state.c.n, at = interval(state.flags) || [0, 1];
  const moves = { ArrowRight: [1, 0], ArrowLeft: [-1, 0], ArrowUp: [0, 1], ArrowDown: [0, -1], Home: [-at[0], 0], PageUp: [0, 5], PageDown: [0, -5] };
  const move = moves[event.key];
  if (!move) return;
  event.preventDefault();
  chooseInterval((at[0] + move[0] + n) % n, Math.max(1, Math.min(n - 1, at[1] + move[1])));
});

if (state.c.n > 0) {
  limits();
  state.flags = first(state.c);
  update();
} else el("explore").hidden = true;
window.lierneCut = () => (typeof state.c.dims === "number" ? disk.cut.size : undefined);
document.documentElement.dataset.ready = "1";
