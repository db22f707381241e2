// Opens reports in headless Chromium as people do: phone and desk, light and dark, on paper. Usage: node check.mjs [--shots DIR] REPORT...
// Says what is wrong, one line each, and ends with 1 where anything is: a console message, a request, a page wider than its window, text of a
// plot outside it, a keyboard that does not get along, or a fault that axe-core finds (contrast, landmarks, headings, tables, names).
import fs from 'node:fs';
import path from 'node:path';
import { pathToFileURL } from 'node:url';
import { createRequire } from 'node:module';
import { chromium } from 'playwright-core';

const axe = fs.readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');
let reports = process.argv.slice(2);
const shots = reports[0] === '--shots' ? reports[1] : null;
if (shots) {
  reports = reports.slice(2);
  fs.mkdirSync(shots, { recursive: true });
}
const faults = [];
const views = [360, 1280].flatMap(width => ['light', 'dark'].map(scheme => ({ width, scheme, media: 'screen' })));
views.push({ width: 673, scheme: 'dark', media: 'print' }); // A4 less its margins of 16 mm, at 96 pixels an inch

const browser = await chromium.launch({ executablePath: process.env.CHROMIUM ?? '/usr/bin/chromium', args: ['--no-sandbox'] });
for (const report of reports) {
  const url = pathToFileURL(path.resolve(report)).href;
  for (const view of views) {
    const name = `${path.basename(path.dirname(report))} ${view.width} ${view.scheme} ${view.media}`;
    const fault = text => {
      faults.push(text);
      console.log(`${name}: ${text}`);
    };
    const page = await browser.newPage({ viewport: { width: view.width, height: 900 }, colorScheme: view.scheme });
    page.on('console', message => fault(`console: ${message.text()}`));
    page.on('pageerror', error => fault(`error: ${error.message}`));
    page.on('request', request => request.url() !== url && !request.url().startsWith('data:') && fault(`request: ${request.url()}`));
    await page.emulateMedia({ media: view.media, colorScheme: view.scheme });
    await page.goto(url);
    const found = await page.evaluate(() => {
      const wide = document.documentElement.scrollWidth - window.innerWidth;
      const outside = [...document.querySelectorAll('svg text')].filter(text => {
        const box = text.getBoundingClientRect();
        return box.width > 0 && (box.left < 0 || box.right > window.innerWidth);
      }).map(text => text.textContent);
      return { wide, outside };
    });
    if (found.wide > 0)
      fault(`${found.wide} pixels wider than the window`);
    for (const text of found.outside)
      fault(`text of a plot outside the window: ${text}`);
    if (shots)
      await page.screenshot({ path: path.join(shots, name.replaceAll(' ', '-') + '.png'), fullPage: true });
    if (view.media === 'screen') {
      await page.keyboard.press('Tab');
      const skip = await page.evaluate(() => {
        const focus = document.activeElement.getBoundingClientRect();
        return document.activeElement.className === 'skip' && focus.left >= 0 && focus.top >= 0;
      });
      if (!skip)
        fault('the first tab stop is not a visible skip link');
      await page.keyboard.press('Enter');
      if (await page.evaluate(() => document.activeElement.tagName) !== 'MAIN')
        fault('the skip link does not lead to the results');
      await page.evaluate(() => document.querySelectorAll('details').forEach(details => { details.open = true; }));
      await page.evaluate(axe);
      const result = await page.evaluate(() => window.axe.run({ resultTypes: ['violations'] }));
      for (const violation of result.violations) {
        const node = violation.nodes[0];
        fault(`axe ${violation.id} (${violation.nodes.length}): ${violation.help}: ${node.html.slice(0, 160)} ${node.failureSummary?.replaceAll('\n', ' ') ?? ''}`);
      }
      if (await page.evaluate(() => document.documentElement.scrollWidth > window.innerWidth))
        fault('wider than the window once the tables are open');
    }
    await page.close();
  }
}
await browser.close();
process.exit(faults.length > 0 ? 1 : 0);
