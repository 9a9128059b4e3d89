const DATA = JSON.parse(document.getElementById("data").textContent);
const EVIDENCE = [
  { word: "geometry", sign: "●", says: "Absorbing tensors from both sides leaves nothing over: the cut is exact and the spectrum flat." },
  { word: "finite field", sign: "◆", says: "Exact, by ranks over a finite field: what is left between the two sides is a network of stabilizer tensors." },
  { word: "contraction", sign: "▲", says: "The core between the two sides was contracted; the entropy comes from its singular values." },
  { word: "estimate", sign: "≈", says: "Estimated, with an error bar; not a proof." },
  { word: "bounds", sign: "↕", says: "The exact contraction exceeds the budget of this study: proven lower and upper bound." },
];
const KINDS = ["interval", "named", "union", "subset"];
const el = (id) => document.getElementById(id);

/** Pairs [value, times, …] as one array. */
function unroll(runs) {
  let n = 0;
  for (let i = 1; i < runs.length; i += 2) n += runs[i];
  const out = new Uint32Array(n);
  for (let i = 0, at = 0; i < runs.length; i += 2) { out.fill(runs[i], at, at + runs[i + 1]); at += runs[i + 1]; }
  return out;
}

/** Sites as text: maximal ranges from the lowest start on, one that wraps last. */
function shown(flags) {
  const n = flags.length;
  if (flags.every((f) => f)) return `0..${n}`;
  const parts = [];
  for (let a = 0; a < n; a++) {
    if (!flags[a] || flags[(a + n - 1) % n]) continue;
    let b = a;
    while (flags[b % n]) b++;
    parts.push(b === a + 1 ? `${a}` : b > n ? `${a}..${b - n}` : `${a}..${b}`);
  }
  return parts.join(",");
}

/** Text as sites, or a sentence that says what is wrong with it. */
function read(text, n) {
  const flags = new Uint8Array(n);
  for (const part of text.split(",").map((p) => p.trim()).filter(Boolean)) {
    const range = part.match(/^(\d+)\s*\.\.\s*(\d+)$/);
    if (range) {
      const a = Number(range[1]), b = Number(range[2]);
      if (a >= n || b > n) return `${part} goes past the last site, ${n - 1}`;
      for (let s = a; s !== b; s++) { if (s === n) { s = 0; if (b === 0) break; } flags[s] = 1; }
    } else if (/^\d+$/.test(part)) {
      if (Number(part) >= n) return `site ${part} is past the last one, ${n - 1}`;
      flags[Number(part)] = 1;
    } else return `“${part}” is neither a site nor a range a..b`;
  }
  return flags;
}

/** The single interval that the flags are, as [start, length]; null for anything else. */
function interval(flags) {
  const n = flags.length;
  let length = 0, start = -1, parts = 0;
  for (let s = 0; s < n; s++) {
    if (!flags[s]) continue;
    length++;
    if (!flags[(s + n - 1) % n]) { parts++; start = s; }
  }
  if (length === n) return [0, n];
  return parts === 1 ? [start, length] : null;
}

function intervalFlags(start, length, n) {
  const flags = new Uint8Array(n);
  for (let k = 0; k < Math.min(length, n); k++) flags[(((start + k) % n) + n) % n] = 1;
  return flags;
}

/** What the study knows, case by case. */
class Case {
  constructor(raw) {
    Object.assign(this, raw);
    this.graphData = DATA.graphs[raw.graph];
    this.n = raw.boundary;
    this.unit = raw.legDimension > 1 ? Math.log(raw.legDimension) : 1;
    this.byLength = new Map(raw.intervals.map((row) => [row[0], row]));
    this.byText = new Map(raw.others.map((o) => [o[0], o[3]]));
  }
  /** Nats in legs (in nats where legs differ), whole numbers as such. */
  inUnits(nats) { return nats === null || nats === undefined ? null : Math.round((nats / this.unit) * 1e12) / 1e12; }
  find(flags) {
    const one = interval(flags);
    if (one && one[1] < this.n) {
      const row = this.byLength.get(one[1]);
      if (row) {
        const [, starts, every] = row;
        const codes = row.codes || (row.codes = unroll(row[3]));
        const at = every ? (one[0] - starts) / every : starts.indexOf(one[0]);
        if (Number.isInteger(at) && at >= 0 && at < codes.length) return codes[at];
      }
    }
    return this.byText.get(shown(flags));
  }
  /** The answer about a region, or about its complement where that says the same. */
  answer(flags) {
    let at = this.find(flags);
    if (at === undefined && this.bulk === 0) at = this.find(flags.map((f) => 1 - f));
    if (at === undefined) return null;
    const v = this.values[at];
    return {
      cutLegs: v[0], cut: this.inUnits(v[1]), entropy: this.inUnits(v[2]), lower: this.inUnits(v[3]),
      upper: this.inUnits(v[4]), evidence: v[5], error: this.inUnits(v[6]), core: v[7], price: v[8], how: v[9], spectrum: v[10],
    };
  }
}
const CASES = DATA.cases.map((c) => new Case(c));
const UNIT = CASES.length && CASES.every((c) => c.unit !== 1 || c.legDimension === null) && CASES[0].unit === 1 ? "nats" : "legs";

/** A number without trailing noise: whole numbers plain, others to five decimals. */
function num(x, digits = 5) {
  if (x === null || x === undefined) return "–";
  if (Math.abs(x - Math.round(x)) < 1e-9) return String(Math.round(x));
  return x.toFixed(digits);
}
/** An entropy as shown: the number, or the bracket that holds it. */
function entropyText(a) {
  if (!a) return "–";
  if (a.entropy !== null) return num(a.entropy);
  return `${num(a.lower)} … ${num(a.upper)}`;
}
const ten = (log10) => {
  if (log10 === null || log10 === undefined) return "–";
  if (log10 < 4) return String(Math.round(10 ** log10));
  const e = Math.floor(log10);
  return `${(10 ** (log10 - e)).toFixed(1)}·10${[...String(e)].map((d) => "⁰¹²³⁴⁵⁶⁷⁸⁹"[d] || "⁻").join("")}`;
};
