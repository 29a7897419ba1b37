// Opens pages that `halfwidth page` wrote in Chromium, at the width of a desk
// and of a phone, in light and dark, and in print. It fails where a page asks
// for anything but itself, reports an error, scrolls sideways as a whole, has
// text in a picture too small to read, misses a picture, or breaks a rule of
// accessibility that axe-core ranks serious or critical.
//
//   npm ci && node check.mjs PAGE.html…        --shots FOLDER keeps screenshots

import { readFileSync, mkdtempSync, rmSync, mkdirSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve, basename } from 'node:path';
import { pathToFileURL } from 'node:url';
import { createRequire } from 'node:module';
import { chromium } from 'playwright-core';

const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');
const words = process.argv.slice(2);
const at = words.indexOf('--shots');
const shots = at >= 0 ? words.splice(at, 2)[1] : '';
if (shots) mkdirSync(shots, { recursive: true });
if (words.length === 0) {
  console.error('name the pages: node check.mjs PAGE.html…');
  process.exit(2);
}

const smallestText = 11; // pixels
const faults = [];
const views = [];
for (const width of [1280, 390]) {
  for (const colorScheme of ['light', 'dark']) views.push({ width, colorScheme });
}

const profile = mkdtempSync(join(tmpdir(), 'page-check-'));
const browser = await chromium.launchPersistentContext(profile, {
  executablePath: process.env.CHROMIUM ?? '/usr/bin/chromium',
  args: ['--headless', '--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking',
    '--disable-component-update', '--disable-sync'],
  bypassCSP: true, // for axe-core alone; that the page fetches nothing is seen from its requests
});
try {
  for (const file of words) {
    for (const view of views) {
      const where = `${basename(file)}, ${view.width} wide, ${view.colorScheme}`;
      const say = (fault) => faults.push(`${where}: ${fault}`);
      const page = await browser.newPage();
      await page.setViewportSize({ width: view.width, height: 900 });
      await page.emulateMedia({ colorScheme: view.colorScheme });
      const url = pathToFileURL(resolve(file)).href;
      page.on('console', (message) => { if (message.type() === 'error') say(`console: ${message.text()}`); });
      page.on('pageerror', (error) => say(`error: ${error.message}`));
      page.on('request', (request) => { if (request.url() !== url) say(`asks for ${request.url()}`); });
      await page.goto(url);

      const seen = await page.evaluate((smallest) => {
        const root = document.documentElement;
        const texts = [...document.querySelectorAll('svg text')].map((t) => ({
          size: parseFloat(getComputedStyle(t).fontSize) * t.ownerSVGElement.getScreenCTM().a,
          text: t.textContent,
          spill: Math.max(-t.getBoundingClientRect().left, t.getBoundingClientRect().right - root.clientWidth),
        }));
        return {
          sideways: root.scrollWidth - root.clientWidth,
          articles: [...document.querySelectorAll('article')].map((a) => ({
            id: a.id,
            refused: / refused$/.test(a.querySelector('.eyebrow').textContent.trim()),
            pictures: a.querySelectorAll('svg').length,
            named: [...a.querySelectorAll('svg')].every((s) => s.getAttribute('role') === 'img' && s.querySelector('title')?.textContent.length > 10),
          })),
          small: texts.filter((t) => t.size < smallest).map((t) => `${t.text} (${t.size.toFixed(1)})`),
          spilled: texts.filter((t) => t.spill > 1).map((t) => t.text),
        };
      }, smallestText);
      if (seen.sideways > 0) say(`it scrolls sideways by ${seen.sideways} pixels`);
      if (seen.articles.length === 0) say('it shows no calculation');
      for (const a of seen.articles) {
        const want = a.refused ? 0 : 1;
        if (a.pictures !== want) say(`${a.id} has ${a.pictures} pictures, want ${want}`);
        if (!a.named) say(`${a.id}: its picture has no text in its place`);
      }
      if (seen.small.length > 0) say(`text below ${smallestText} pixels: ${seen.small.slice(0, 5).join(', ')}`);
      if (seen.spilled.length > 0) say(`text of a picture leaves the page: ${seen.spilled.slice(0, 5).join(', ')}`);

      await page.evaluate(axe);
      const result = await page.evaluate(() => globalThis.axe.run(document, { resultTypes: ['violations'] }));
      for (const v of result.violations) {
        if (v.impact === 'serious' || v.impact === 'critical') {
          say(`${v.id} (${v.impact}): ${v.help}; ${v.nodes.length} times, first at ${v.nodes[0].target.join(' ')}`);
        }
      }
      if (shots) await page.screenshot({ path: join(shots, `${basename(file, '.html')}-${view.width}-${view.colorScheme}.png`), fullPage: true });
      if (view === views[0]) {
        const pdf = await page.pdf({ format: 'A4', ...(shots ? { path: join(shots, `${basename(file, '.html')}.pdf`) } : {}) });
        if (pdf.length < 10000) say('it prints nearly nothing');
      }
      const minor = result.violations.map((v) => `${v.id} (${v.impact})`);
      console.log(`${where}: ${seen.articles.length} calculations; axe-core: ${result.passes.length} rules kept, broken: ${minor.join(', ') || 'none'}`);
      await page.close();
    }
  }
} finally {
  await browser.close();
  rmSync(profile, { recursive: true, force: true });
}

for (const fault of faults) console.error(fault);
process.exit(faults.length > 0 ? 1 : 0);
