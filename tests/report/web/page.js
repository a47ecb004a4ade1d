// The report page in a real browser: no accessibility violation (axe-core, light and dark, wide and narrow), no console message, no
// request beyond the page, nothing wider than the window, complete without scripts and in print; sorting, filtering, charts and
// layers work from the keyboard; its values are those of results.json; hostile names stay text.
// Usage: node page.js FOLDER HOSTILE_FOLDER CHROMIUM (both folders written by `sward run --out`)
'use strict';
const fs = require('fs');
const puppeteer = require('puppeteer-core');
const axe = fs.readFileSync(require.resolve('axe-core/axe.min.js'), 'utf8');

let failed = 0;
function check(ok, what) {
  if (ok) return;
  failed++;
  console.error('failed: ' + what);
}
const pause = (page) => page.evaluate(() => new Promise((done) => requestAnimationFrame(() => requestAnimationFrame(done))));

async function open(browser, folder, { width = 1280, dark = false, script = true, policy = true } = {}) {
  const page = await browser.newPage();
  const said = [], asked = [];
  page.on('console', (m) => said.push(m.text()));
  page.on('pageerror', (e) => said.push(e.message));
  page.on('dialog', (d) => { said.push('dialog ' + d.message()); d.dismiss(); });
  page.on('request', (q) => { if (!q.url().startsWith('data:')) asked.push(q.url()); });
  if (!policy) await page.setBypassCSP(true);
  await page.setJavaScriptEnabled(script);
  if (dark) await page.emulateMediaFeatures([{ name: 'prefers-color-scheme', value: 'dark' }]);
  await page.setViewport({ width, height: 900 });
  await page.goto('file://' + folder + '/report.html');
  return { page, said, asked };
}

async function accessible(browser, folder, dark, width) {
  const { page } = await open(browser, folder, { dark, width, policy: false }); // the policy would keep the checker itself out
  await page.evaluate(() => document.querySelectorAll('section').forEach((s) => { // what repeats sample by sample is alike
    Array.from(s.querySelectorAll('details')).forEach((d, i) => { if (i < 2) d.open = true; else d.querySelector('.scroll')?.remove(); });
    for (const repeated of ['.small-multiples figure', '.card']) Array.from(s.querySelectorAll(repeated)).slice(3).forEach((f) => f.remove());
  }));
  await page.evaluate(axe);
  const found = await page.evaluate(() => axe.run(document, { resultTypes: ['violations'] }));
  for (const v of found.violations)
    check(false, `${dark ? 'dark' : 'light'} ${width}: ${v.id} (${v.nodes.length}): ${v.help}: ${v.nodes[0].html.slice(0, 160)}`);
  check(found.passes.length > 10, 'the checker looked at something');
  await page.close();
}

async function quiet(browser, folder, width) {
  const { page, said, asked } = await open(browser, folder, { width });
  await page.evaluate(async () => {
    for (let y = 0; y < document.body.scrollHeight; y += 800) { scrollTo(0, y); await new Promise((done) => requestAnimationFrame(done)); }
  });
  check(said.length === 0, `no console message at ${width} px: ${said[0]}`);
  check(asked.length === 1, `one request at ${width} px, found ${asked.length}: ${asked[1]}`);
  const wide = await page.evaluate(() => document.documentElement.scrollWidth);
  check(wide <= width, `nothing wider than ${width} px: ${wide}`);
  await page.close();
}

async function keyboard(browser, folder) {
  const { page, said } = await open(browser, folder);
  const names = () => page.evaluate(() =>
    Array.from(document.querySelectorAll('table.samples tbody tr:not([hidden]) th')).map((h) => h.firstChild.textContent));
  const before = await names();
  await page.focus('table.samples thead th button');
  await page.keyboard.press('Enter');
  check((await names()).join() === before.slice().sort().join(), 'Enter on a heading sorts up');
  await page.keyboard.press('Enter');
  check((await names()).join() === before.slice().sort().reverse().join(), 'Enter again sorts down');
  await page.focus('.tools input');
  await page.keyboard.type(before[0].toLowerCase());
  const left = await names();
  check(left.length < before.length && left.includes(before[0]), 'typing filters');
  const status = await page.evaluate(() => document.querySelector('.tools [role=status]').textContent);
  check(status === `${left.length} of ${before.length} samples shown`, 'the filter says how many are left: ' + status);
  check(said.length === 0, 'no console message in use: ' + said[0]);
  await page.close();
}

// What the page shows is what results.json holds: rounded, and whole in the element's value.
async function values(browser, folder) {
  const results = JSON.parse(fs.readFileSync(folder + '/results.json', 'utf8'));
  const { page } = await open(browser, folder);
  const rows = await page.evaluate(() => Object.fromEntries(Array.from(document.querySelectorAll('table.samples tbody tr')).map((r) =>
    [r.querySelector('th').firstChild.textContent, Array.from(r.querySelectorAll('td data')).map((d) => [d.value, d.textContent, d.className])])));
  check(Object.keys(rows).length === results.samples.length, 'a row for every sample');
  for (const s of results.samples) {
    const shown = (rows[s.sample] || []).filter((d) => d[2] !== 'percent').map((d) => Number(d[0]));
    const percent = (rows[s.sample] || []).filter((d) => d[2] === 'percent');
    if (s.spacing_nm !== null) check(shown.includes(s.spacing_nm) && shown.includes(s.height_nm), `spacing and height of ${s.sample} in the page`);
    if (s.weighted_reflectance !== null)
      check(percent.map((d) => Number(d[0])).join().includes([s.weighted_reflectance, s.weighted_reflectance_lo, s.weighted_reflectance_hi].join()), `reflectance of ${s.sample}`);
    for (const [value, text, kind] of rows[s.sample] || []) {
      const v = Number(value) * (kind === 'percent' ? 100 : 1), places = (text.split('.')[1] || '').length;
      check(Math.abs(Number(text) - v) <= 0.51 * 10 ** -places || Math.abs(Number(text) / v - 1) < 0.06, `${value} is shown as ${text}`);
    }
  }
  await page.close();
}

async function charts(browser, folder) {
  const results = JSON.parse(fs.readFileSync(folder + '/results.json', 'utf8'));
  const { page, said } = await open(browser, folder);
  const counts = await page.evaluate(() => ({ charts: document.querySelectorAll('.chart[data-plot]').length, live: document.querySelectorAll('canvas').length,
    csv: document.querySelectorAll('table.csv').length, copies: Array.from(document.querySelectorAll('button.copy')).filter((b) => b.textContent !== 'PNG' && !b.closest('.layers')).length }));
  check(counts.charts > 5 && counts.live < counts.charts, 'only charts near the window are live: ' + JSON.stringify(counts));
  check(counts.csv === counts.copies, 'every data table has its copy button: ' + JSON.stringify(counts));
  const spectrum = results.spectra[0], at = spectrum.wavelength_nm.indexOf(600);
  await page.evaluate(() => document.querySelector('#optics .small-multiples').scrollIntoView());
  await page.waitForSelector('#optics .small-multiples canvas');
  const drawn = await page.evaluate(() => {
    const chart = Chart.getChart(document.querySelector('#optics .small-multiples canvas')), set = chart.data.datasets.filter((d) => !d.aside && d.data.length);
    return set[set.length - 1].data.find((p) => p.x >= 595 && p.x <= 605);
  });
  const k = spectrum.wavelength_nm.indexOf(drawn ? drawn.x : -1);
  check(at < 0 || (k >= 0 && Math.abs(drawn.y / 100 / spectrum.reflectance[k] - 1) < 1e-4), 'the chart draws the spectrum of results.json');
  await page.evaluate(() => document.querySelector('#series').scrollIntoView());
  await page.waitForSelector('#series canvas');
  await page.focus('#series canvas');
  await page.keyboard.press('ArrowRight');
  await pause(page);
  const words = await page.evaluate(() => document.querySelector('#series .said').textContent);
  check(/^\S.*: spacing: [0-9.]+ nm \([0-9.]+ to [0-9.]+ nm\), (conforms|fails|undecided|no target)$/.test(words), 'an arrow key says a point: ' + words);
  const copied = await page.evaluate(async () => {
    let text = '';
    Object.defineProperty(navigator, 'clipboard', { value: { writeText: (t) => { text = t; return Promise.resolve(); } } });
    document.querySelector('#series .chart-tools button:last-child').click();
    return text;
  });
  check(copied.split('\n')[0].includes('spacing (nm)') && copied.split('\n').length > 2, 'a chart is copied as CSV: ' + copied.slice(0, 60));
  const saved = await page.evaluate(() => new Promise((done) => {
    URL.createObjectURL = (blob) => { done([blob.type, blob.size]); return 'data:,'; };
    HTMLAnchorElement.prototype.click = () => {};
    document.querySelector('#series .chart-tools button').click();
  }));
  check(saved[0] === 'image/png' && saved[1] > 5000, 'a chart is saved as PNG: ' + saved);
  check(said.length === 0, 'no console message from charts: ' + said[0]);
  await page.close();
}

async function withoutScript(browser, folder) {
  const { page } = await open(browser, folder, { script: false });
  const seen = await page.evaluate(() => ({
    rows: document.querySelectorAll('table.samples tbody tr').length,
    charts: Array.from(document.querySelectorAll('figure svg')).filter((s) => s.getBoundingClientRect().height > 50).length,
    boxes: document.querySelectorAll('.chart').length,
    buttons: document.querySelectorAll('button, input').length,
    pictures: Array.from(document.images).filter((i) => i.src.startsWith('data:')).length,
  }));
  check(seen.rows > 1 && seen.boxes > 2 && seen.charts >= seen.boxes && seen.pictures > 0, 'rows, charts and pictures without scripts: ' + JSON.stringify(seen));
  check(seen.buttons === 0, 'no dead button without scripts');
  await page.close();
}

async function print(browser, folder) {
  const { page } = await open(browser, folder, { width: 718 }); // A4 less its margins
  await page.emulateMediaType('print');
  const seen = await page.evaluate(() => ({
    wide: document.documentElement.scrollWidth,
    canvases: Array.from(document.querySelectorAll('canvas')).filter((c) => c.getBoundingClientRect().height > 0).length,
    drawings: Array.from(document.querySelectorAll('.chart > svg')).every((s) => s.getBoundingClientRect().height > 50),
    cut: Array.from(document.querySelectorAll('.scroll')).filter((s) => !s.closest('details:not([open])') && s.scrollWidth > s.clientWidth + 1).map((s) => s.getAttribute('aria-label')),
  }));
  check(seen.wide <= 718 && seen.canvases === 0 && seen.drawings, 'print shows the drawings and fits the sheet: ' + JSON.stringify(seen));
  check(seen.cut.length === 0, 'no table is cut in print: ' + seen.cut.slice(0, 3));
  await page.close();
}

async function hostile(browser, folder) {
  const { page, said, asked } = await open(browser, folder);
  const owned = await page.evaluate(() => ({ title: document.title, scripts: document.scripts.length, strays: document.querySelectorAll('img:not([src^="data:"]), iframe, object, form').length }));
  check(!owned.title.includes('owned') && owned.scripts === 2 && owned.strays === 0, 'hostile names make nothing: ' + JSON.stringify(owned));
  check(said.length === 0 && asked.length === 1, `hostile names stay silent: ${said[0]} ${asked[1]}`);
  await page.close();
}

(async () => {
  const [folder, strange, executablePath] = process.argv.slice(2);
  const browser = await puppeteer.launch({ executablePath, headless: true, args: ['--no-sandbox', '--disable-gpu'] });
  try {
    await accessible(browser, folder, false, 1280);
    await accessible(browser, folder, true, 390);
    for (const width of [1400, 820, 390]) await quiet(browser, folder, width);
    await keyboard(browser, folder);
    await values(browser, folder);
    await charts(browser, folder);
    await withoutScript(browser, folder);
    await print(browser, folder);
    await hostile(browser, strange);
  } finally {
    await browser.close();
  }
  process.exit(failed ? 1 : 0);
})().catch((e) => { console.error(e); process.exit(1); });
