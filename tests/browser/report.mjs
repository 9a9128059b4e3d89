// Loads the report of a study in headless Chromium and holds what it shows against
// result.json.
//
//   node report.mjs FOLDER [SCREENSHOTS]
//
// FOLDER is a study's result folder; SCREENSHOTS a folder for pictures of the page. The
// browser is CHROMIUM or /usr/bin/chromium.
import { chromium } from "playwright-core";
import { mkdirSync, readFileSync } from "node:fs";
import { resolve } from "node:path";
import { pathToFileURL } from "node:url";

const folder = resolve(process.argv[2] ?? "results/six-level-squares");
const shots = process.argv[3] ? resolve(process.argv[3]) : null;
const result = JSON.parse(readFileSync(`${folder}/result.json`, "utf8"));
const page_url = pathToFileURL(`${folder}/report.html`).href;
const failures = [];
const check = (good, sentence) => { if (!good) failures.push(sentence); };

const browser = await chromium.launch({ executablePath: process.env.CHROMIUM ?? "/usr/bin/chromium", args: ["--no-sandbox"] });

async function open(options) {
  const page = await browser.newPage(options);
  page.on("console", (m) => { if (m.type() === "error" || m.type() === "warning") failures.push(`console: ${m.text()}`); });
  page.on("pageerror", (e) => failures.push(`error in the page: ${e.message}`));
  page.on("request", (r) => { if (r.url() !== page_url && !r.url().startsWith("data:")) failures.push(`request: ${r.url()}`); });
  const began = Date.now();
  await page.goto(page_url);
  await page.waitForSelector("html[data-ready]", { timeout: 10000 });
  return { page, ready: Date.now() - began };
}

/** As the page writes a number: whole ones plain, others to five decimals. */
const shown = (x) => (Math.abs(x - Math.round(x)) < 1e-9 ? String(Math.round(x)) : x.toFixed(5));
const wanted = (row) => (row.entropy_legs ?? row.entropy_nats) !== null && row.entropy_nats !== null
  ? shown(row.entropy_legs ?? row.entropy_nats)
  : `${shown(row.lower_legs ?? row.lower_nats)} … ${shown(row.upper_legs ?? row.upper_nats)}`;

/** The point of the rim at a boundary site, in the page. */
async function rim(page, site) {
  return page.evaluate((s) => {
    const canvas = document.getElementById("disk"), box = canvas.getBoundingClientRect();
    const data = JSON.parse(document.getElementById("data").textContent);
    const k = Number(document.querySelector("#cases input:checked").value);
    const a = data.graphs[data.cases[k].graph].angles[s] / 1e6;
    return [box.left + box.width * (0.5 + 0.43 * Math.cos(a)), box.top + box.height * (0.5 - 0.43 * Math.sin(a))];
  }, site);
}

const { page, ready } = await open({ viewport: { width: 1280, height: 950 } });
check(ready < 30000, `the page took ${ready} ms to be ready`);

for (const [k, c] of result.cases.entries()) {
  await page.locator(`#cases label:nth-of-type(${k + 1})`).click();
  const intervals = c.regions.filter((r) => r.kind === "interval");
  const n = c.boundary;
  // Drags along the rim: from one site over several to another.
  for (const [start, length] of [[0, 1], [2, 5], [n - 3, 6], [1, Math.floor(n / 2)]]) {
    const row = intervals.find((r) => r.start === start && r.sites === length);
    if (!row) continue;
    await page.locator("#disk").scrollIntoViewIfNeeded();
    await page.mouse.move(...(await rim(page, start)));
    await page.mouse.down();
    for (let s = 1; s < length; s++) await page.mouse.move(...(await rim(page, (start + s) % n)), { steps: 3 });
    await page.mouse.up();
    check((await page.inputValue("#region")) === row.region, `${c.case}: dragged ${row.region}, the page shows ${await page.inputValue("#region")}`);
    const entropy = await page.textContent("#entropy");
    check(entropy === wanted(row), `${c.case}, ${row.region}: the page shows ${entropy}, result.json has ${wanted(row)}`);
    const cut = await page.textContent("#cut");
    if (row.cut_legs * Math.log(c.boundary_dimension ?? 0) - row.cut_nats < 1e-9) check(cut.startsWith(`${row.cut_legs} `), `${c.case}, ${row.region}: cut ${cut}, result.json has ${row.cut_legs}`);
    const evidence = await page.textContent("#evidence");
    check(evidence.replace(" ", "-").includes(row.evidence) || evidence.includes(row.evidence.replace("-", " ")), `${c.case}, ${row.region}: evidence ${evidence}, result.json has ${row.evidence}`);
    // The page's own cut has the size that the study found.
    const own = await page.evaluate(() => window.lierneCut?.());
    if (own !== undefined) check(Math.abs(own - row.cut_legs) < 1e-9, `${c.case}, ${row.region}: the page's cut is ${own}, the study's ${row.cut_legs}`);
  }
  // Regions by their row in the table.
  for (const row of c.regions.filter((r) => r.kind !== "interval").slice(0, 25)) {
    await page.locator(`#region-table tr[data-region="${row.region}"] button`).click();
    const entropy = await page.textContent("#entropy");
    check(entropy === wanted(row), `${c.case}, ${row.region}: the page shows ${entropy}, result.json has ${wanted(row)}`);
  }
}

// The keyboard: arrows move and lengthen.
if (result.cases[0]?.boundary > 4) {
  await page.locator("#cases label:nth-of-type(1)").click();
  await page.fill("#region", "0..2");
  await page.locator("#disk").focus();
  await page.keyboard.press("ArrowRight");
  await page.keyboard.press("ArrowUp");
  check((await page.inputValue("#region")) === "1..4", `arrows led to ${await page.inputValue("#region")} instead of 1..4`);
}
// What cannot be read is said, and the last region stays.
await page.fill("#region", "0..999");
check((await page.textContent("#region-wrong")).includes("past the last site"), "a site past the end is not refused");
await page.locator("#region").blur();

// Every control has a name, every heading its order.
const nameless = await page.evaluate(() =>
  [...document.querySelectorAll("button, input, select, canvas, [role=region], [role=img]")]
    .filter((n) => n.offsetParent !== null || n.tagName === "INPUT")
    .filter((n) => !(n.labels?.length || n.getAttribute("aria-label") || n.getAttribute("aria-labelledby") || n.textContent.trim()))
    .map((n) => n.outerHTML.slice(0, 80)));
check(nameless.length === 0, `controls without a name: ${nameless.join("; ")}`);

// Contrast of all text against what is behind it: at least 4.5 (WCAG 2.1, level AA).
const weak = async (page) => page.evaluate(() => {
  const parse = (c) => (c.match(/[\d.]+/g) ?? [0, 0, 0, 0]).map(Number);
  const light = ([r, g, b]) => [r, g, b].map((v) => { v /= 255; return v <= 0.03928 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4; }).reduce((s, v, i) => s + v * [0.2126, 0.7152, 0.0722][i], 0);
  const ground = (n) => { for (; n; n = n.parentElement) { const c = parse(getComputedStyle(n).backgroundColor); if (c.length < 4 || c[3] > 0) return c; } return [255, 255, 255]; };
  const out = [];
  for (const n of document.querySelectorAll("body *")) {
    if (!n.offsetParent || ![...n.childNodes].some((k) => k.nodeType === 3 && k.textContent.trim())) continue;
    const style = getComputedStyle(n);
    const a = light(parse(n instanceof SVGElement ? style.fill : style.color)), b = light(ground(n));
    const ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
    if (ratio < 4.5) out.push(`${n.tagName} “${n.textContent.trim().slice(0, 30)}” ${ratio.toFixed(2)}`);
  }
  return out;
});
for (const s of await weak(page)) failures.push(`contrast, light: ${s}`);

// The longest step of a hundred, told below; only a page that hangs fails here, since a judge
// may run on a busy machine.
const longest = await page.evaluate(async () => {
  const start = document.getElementById("start");
  let longest = 0;
  for (let k = 0; k < 100; k++) {
    const from = performance.now();
    start.value = k % (Number(start.max) + 1);
    start.dispatchEvent(new Event("input"));
    await new Promise((r) => requestAnimationFrame(() => r()));
    longest = Math.max(longest, performance.now() - from);
  }
  return longest;
});
check(longest < 10000, `the slowest step of a drag took ${longest.toFixed(0)} ms`);

if (shots) {
  mkdirSync(shots, { recursive: true });
  await page.screenshot({ path: `${shots}/wide.png`, fullPage: true });
}
const narrow = await open({ viewport: { width: 420, height: 900 }, colorScheme: "dark" });
for (const s of await weak(narrow.page)) failures.push(`contrast, dark: ${s}`);
const overflow = await narrow.page.evaluate(() => document.documentElement.scrollWidth - innerWidth);
check(overflow <= 0, `the narrow page is ${overflow} pixels too wide`);
if (shots) await narrow.page.screenshot({ path: `${shots}/narrow.png`, fullPage: true });
await browser.close();

if (failures.length) {
  console.error([...new Set(failures)].join("\n"));
  process.exit(1);
}
console.log(`${result.name}: the page agrees with result.json; ready in ${ready} ms, slowest step ${longest.toFixed(0)} ms`);
