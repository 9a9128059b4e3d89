/** Tables. */
function row(body, cells, first = "th") {
  const tr = document.createElement("tr");
  cells.forEach((cell, i) => {
    const td = document.createElement(i === 0 ? first : "td");
    if (i === 0 && first === "th") td.scope = "row";
    if (i > 0 && /^[<>]?[\d–.…·\s⁰¹²³⁴⁵⁶⁷⁸⁹⁻,-]+$/.test(cell)) td.className = "n";
    td.textContent = cell;
    tr.append(td);
  });
  body.append(tr);
  return tr;
}
const headOf = (cells) => `<tr>${cells.map((c, i) => `<th scope="col"${i && c.n ? ' class="n"' : ""}></th>`).join("")}</tr>`;
function head(table, cells) {
  table.tHead.innerHTML = headOf(cells.map((c) => ({ n: c.startsWith("#") })));
  [...table.tHead.rows[0].cells].forEach((th, i) => { th.textContent = cells[i].replace(/^#/, ""); });
}

/** Regions that are no intervals: one row a region, one column a case. */
class RegionTable {
  constructor(choose) {
    this.table = el("region-table");
    const same = new Map();
    CASES.forEach((c) => c.others.forEach(([text, kind, name], k) => {
      if (!same.has(text)) same.set(text, { text, kind, name, order: same.size });
    }));
    this.rows = [...same.values()].map((r) => {
      const answers = CASES.map((c) => { const at = c.byText.get(r.text); return at === undefined ? null : c.values[at]; });
      const units = (c, nats) => c.inUnits(nats);
      const gaps = answers.map((v, i) => (v ? units(CASES[i], v[1]) - units(CASES[i], v[4]) : 0));
      const flags = read(r.text, Math.max(...CASES.map((c) => c.n)));
      return { ...r, answers, gap: Math.max(...gaps), sites: typeof flags === "string" ? 0 : flags.reduce((s, f) => s + f, 0), entropy: Math.max(...answers.map((v, i) => (v ? units(CASES[i], v[3]) : 0))) };
    });
    if (!this.rows.length) { el("regions").hidden = true; return; }
    head(this.table, ["region", "#sites", "#cut", ...CASES.map((c) => `#${c.case}`)]);
    this.table.tBodies[0].addEventListener("click", (event) => {
      const button = event.target.closest("button"), cell = event.target.closest("tr");
      if (button || cell) choose((button || cell.querySelector("button")).dataset.region);
    });
    el("only-below").addEventListener("change", () => this.fill());
    el("sort").addEventListener("change", () => this.fill());
    el("legend").textContent = EVIDENCE.filter((e) => CASES.some((c) => countOf(c, e))).map((e) => `${e.sign} ${e.word}`).join("   ");
    this.fill();
  }
  fill() {
    const only = el("only-below").checked, by = el("sort").value;
    const list = this.rows.filter((r) => !only || r.gap > 1e-9);
    const keys = { asked: (r) => r.order, gap: (r) => -r.gap, entropy: (r) => -r.entropy, sites: (r) => r.sites };
    list.sort((a, b) => keys[by](a) - keys[by](b) || a.order - b.order);
    this.list = list;
    el("region-count").textContent = `${list.length} of ${this.rows.length} regions`;
    this.table.tBodies[0].textContent = "";
    this.shown = 0;
    this.more(300);
  }
  /** Adds rows; a long table grows when its end is asked for. */
  more(count) {
    const body = this.table.tBodies[0];
    body.querySelector(".more")?.remove();
    for (const r of this.list.slice(this.shown, this.shown + count)) {
      const tr = row(body, ["", String(r.sites), num(CASES.map((c, i) => r.answers[i] && c.inUnits(r.answers[i][1])).find((x) => x !== null && x !== undefined))]);
      const button = document.createElement("button");
      button.type = "button"; button.textContent = r.name ? `${r.name} (${r.text})` : r.text; button.dataset.region = r.text;
      tr.cells[0].append(button);
      tr.dataset.region = r.text;
      r.answers.forEach((v, i) => {
        const td = tr.insertCell();
        td.className = "n";
        if (!v) { td.textContent = "–"; return; }
        const c = CASES[i];
        td.textContent = v[2] !== null ? num(c.inUnits(v[2])) : `${num(c.inUnits(v[3]), 3)} … ${num(c.inUnits(v[4]), 3)}`;
        if (v[4] < v[1] - 1e-9) td.classList.add("below");
        const sign = document.createElement("span");
        sign.className = "sign"; sign.textContent = EVIDENCE[v[5]].sign; sign.title = EVIDENCE[v[5]].word;
        sign.setAttribute("role", "img"); sign.setAttribute("aria-label", EVIDENCE[v[5]].word);
        td.append(sign);
      });
    }
    this.shown += count;
    if (this.shown < this.list.length) {
      const tr = body.insertRow(), td = tr.insertCell();
      tr.className = "more"; td.colSpan = 3 + CASES.length;
      const b = document.createElement("button");
      b.type = "button"; b.textContent = `Show more (${this.list.length - this.shown} left)`;
      b.addEventListener("click", (event) => { event.stopPropagation(); this.more(1000); });
      td.append(b);
    }
  }
  mark(text) {
    if (this.on) this.on.classList.remove("on");
    this.on = [...this.table.tBodies[0].rows].find((r) => r.dataset.region === text);
    if (this.on) this.on.classList.add("on");
  }
}

function evidenceTable() {
  const table = el("evidence-table");
  head(table, ["evidence", ...CASES.map((c) => `#${c.case}`), "#largest core, tensors", "#dearest, multiply-adds", "what it means"]);
  EVIDENCE.forEach((e, i) => {
    const counts = CASES.map((c) => countOf(c, e));
    if (!counts.some((k) => k)) return;
    const of = CASES.flatMap((c) => c.values.filter((v) => v[5] === i));
    const core = Math.max(...of.map((v) => v[7])), price = Math.max(...of.map((v) => v[8] ?? -1));
    const tr = row(table.tBodies[0], [`${e.sign} ${e.word}`, ...counts.map(String), core ? String(core) : "–", price >= 0 ? ten(price) : "–", e.says]);
    tr.cells[0].style.whiteSpace = "nowrap";
    for (let k = 1; k < counts.length + 3; k++) tr.cells[k].className = "n";
  });
}

function blockTable() {
  const table = el("block-table"), body = table.tBodies[0];
  head(table, ["case", "block", "legs", "#tensors", "isometric", "stabilizer"]);
  for (const c of CASES) for (const b of c.blocks) {
    row(body, [c.case, b.name, b.dimensions.join(" × "), String(b.tensors), b.perfect ? "from every half of its legs: perfect" : "from some sets of its legs", b.stabilizer_primes.length ? `over the prime${b.stabilizer_primes.length > 1 ? "s" : ""} ${b.stabilizer_primes.join(", ")}` : "no"]).cells[3].className = "n";
  }
}

function provenance() {
  const r = DATA.run, list = el("provenance");
  const secs = r.wall_seconds < 10 ? r.wall_seconds.toFixed(2) : r.wall_seconds.toFixed(0);
  const put = (k, v) => { const dt = document.createElement("dt"), dd = document.createElement("dd"); dt.textContent = k; dd.textContent = v; list.append(dt, dd); };
  put("study", `${DATA.name} (${r.study_file})`);
  put("command", r.command);
  put("seed", String(DATA.seed));
  put("version", r.version + (r.revision ? ` (${r.revision})` : ""));
  put("begun", r.started);
  put("wall time", `${secs} s, ${r.threads} thread${r.threads === 1 ? "" : "s"}`);
  put("answers", `${DATA.answered} of ${DATA.asked}; ${r.answers_found} found by this run, ${r.answers_kept} kept from earlier ones`);
  put("machine", r.machine);
  put("study file, SHA-256", r.study_sha256);
}
