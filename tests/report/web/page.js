// The report page in a real browser: no accessibility violation (axe-core, light and dark, the first tables of
// every section unfolded), no console message, no request beyond the page and what its links name, nothing wider than the window, complete without scripts;
// sorting and filtering work from the keyboard. Usage: node page.js REPORT CHROMIUM
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

async function open(browser, file, { width = 1280, dark = false, script = true, policy = true } = {}) {
  const page = await browser.newPage();
  const said = [], asked = [];
  page.on('console', (m) => said.push(m.text()));
  page.on('pageerror', (e) => said.push(e.message));
  page.on('request', (q) => { if (!q.url().startsWith('data:')) asked.push(q.url()); });
  if (!policy) await page.setBypassCSP(true);
  await page.setJavaScriptEnabled(script);
  if (dark) await page.emulateMediaFeatures([{ name: 'prefers-color-scheme', value: 'dark' }]);
  await page.setViewport({ width, height: 900 });
  await page.goto('file://' + file);
  return { page, said, asked };
}

async function accessible(browser, file, dark) {
  const { page } = await open(browser, file, { dark, policy: false }); // the policy would keep the checker itself out
  await page.evaluate(() => document.querySelectorAll('section').forEach((s) => { // the folded tables of a section are alike
    Array.from(s.querySelectorAll('details')).forEach((d, i) => { if (i < 2) d.open = true; else d.remove(); });
  }));
  await page.evaluate(axe);
  const found = await page.evaluate(() => axe.run(document, { resultTypes: ['violations'] }));
  for (const v of found.violations)
    check(false, `${dark ? 'dark' : 'light'}: ${v.id} (${v.nodes.length}): ${v.help}: ${v.nodes[0].html.slice(0, 160)}`);
  check(found.passes.length > 10, 'the checker looked at something');
  await page.close();
}

async function quiet(browser, file, width) {
  const { page, said, asked } = await open(browser, file, { width });
  check(said.length === 0, `no console message at ${width} px: ${said[0]}`);
  check(asked.length === 1, `one request at ${width} px, found ${asked.length}: ${asked[1]}`);
  const wide = await page.evaluate(() => document.documentElement.scrollWidth);
  check(wide <= width, `nothing wider than ${width} px: ${wide}`);
  await page.close();
}

async function keyboard(browser, file) {
  const { page, said } = await open(browser, file);
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
  const copies = await page.evaluate(() => [Array.from(document.querySelectorAll('button.copy')).filter((b) => b.textContent !== 'PNG').length, document.querySelectorAll('table.csv').length]);
  check(copies[0] > 0 && copies[0] === copies[1], 'every data table has its copy button: ' + copies);
  check(said.length === 0, 'no console message in use: ' + said[0]);
  await page.close();
}

async function withoutScript(browser, file) {
  const { page } = await open(browser, file, { script: false });
  const seen = await page.evaluate(() => ({
    rows: document.querySelectorAll('table.samples tbody tr').length,
    charts: document.querySelectorAll('figure svg').length,
    buttons: document.querySelectorAll('button, input').length,
    pictures: Array.from(document.images).filter((i) => i.src.startsWith('data:')).length,
  }));
  check(seen.rows > 1 && seen.charts > 2 && seen.pictures > 0, 'rows, charts and pictures without scripts: ' + JSON.stringify(seen));
  check(seen.buttons === 0, 'no dead button without scripts');
  await page.close();
}

(async () => {
  const [file, executablePath] = process.argv.slice(2);
  const browser = await puppeteer.launch({ executablePath, headless: true, args: ['--no-sandbox', '--disable-gpu'] });
  try {
    for (const dark of [false, true]) await accessible(browser, file, dark);
    for (const width of [1280, 820, 390]) await quiet(browser, file, width);
    await keyboard(browser, file);
    await withoutScript(browser, file);
  } finally {
    await browser.close();
  }
  process.exit(failed ? 1 : 0);
})().catch((e) => { console.error(e); process.exit(1); });
