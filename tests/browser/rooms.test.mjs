/** The rooms beyond the time courses, used as a person uses them. */

import assert from 'node:assert/strict';
import { after, before, test } from 'node:test';
import { enter, launch, openPage, paste, rested } from './harness.mjs';

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

const count = (page, selector) => page.locator(selector).count();

test('checks: every check has its plot and its words, and a fault lights one that can be tried and undone', async () => {
  const page = await openPage(browser);
  await enter(page, 'checks');
  await page.waitForSelector('.check');
  assert.ok(await count(page, '.check .small-plot') >= 5);
  assert.match(await page.locator('[data-region="verdict"]').innerText(), /speaks? against the model/);
  // Errors that go on from visit to visit, which the default model leaves out.
  let state = 0;
  let seed = 7;
  const random = () => { seed = (seed * 16807) % 2147483647; return seed / 2147483647 - 0.5; };
  const rows = ['who,arm,day,size'];
  for (let s = 0; s < 24; s += 1) {
    state = random();
    for (let t = 0; t < 10; t += 1) {
      state = 0.8 * state + random();
      rows.push(`w${s},${s % 2 ? 'b' : 'a'},${t},${(20 + t + 2 * state).toFixed(3)}`);
    }
  }
  await paste(page, rows.join('\n'));
  await enter(page, 'checks');
  const lit = page.locator('.check[data-key="serial"][data-lit="true"]');
  await lit.waitFor();
  await page.click('[data-act="try-serial"]');
  await rested(page);
  await page.waitForFunction(() => document.querySelectorAll('.check').length > 0 && !document.querySelector('.check[data-key="serial"][data-lit="true"]'));
  await page.locator('.room-checks .change button').click();
  await lit.waitFor();
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('usual analyses: five, each with its sentence to copy and where it parts from the courses', async () => {
  const page = await openPage(browser);
  await enter(page, 'usual');
  await page.waitForSelector('.analysis');
  assert.equal(await count(page, '.analysis'), 5);
  assert.match(await page.locator('[data-kind="repeated-anova"] .usual-result').innerText(), /F\(.*p [<=]/);
  assert.ok(await count(page, '[data-kind="day-by-day"] .usual-lane') >= 1);
  assert.ok(await count(page, '[data-kind="straight-lines"] .plot-line.dashed') >= 3);
  await page.context().grantPermissions(['clipboard-read', 'clipboard-write']);
  await page.locator('[data-kind="repeated-anova"] .copy-line button').click();
  const copied = await page.evaluate(() => navigator.clipboard.readText());
  assert.match(copied, /Greenhouse/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('sample size: somebody without data reaches the paragraph, by keyboard alone', async () => {
  const page = await openPage(browser);
  await page.locator('.mark-size').focus();
  await page.keyboard.press('Enter');
  await page.waitForSelector('.size-form');
  await page.locator('[data-field="designs"]').fill('4, 20');
  await page.locator('[data-field="studies"]').fill('60');
  await page.locator('[data-act="simulate"]').focus();
  await page.keyboard.press('Enter');
  const paragraph = page.locator('[data-region="size-paragraph"]');
  await page.waitForFunction(() => document.querySelector('[data-region="size-paragraph"]')?.textContent?.includes('(60 studies'), null, { timeout: 60000 });
  const first = await paragraph.innerText();
  assert.match(first, /20 per group, 40 in all, 6 more for expected losses: power \d+ % \(\d+ to \d+\)/);
  // A day moves with the arrow keys, and what was simulated is then said to be of other numbers.
  await page.locator('.day-knob').nth(1).focus();
  await page.keyboard.press('ArrowRight');
  assert.equal(await page.locator('[data-field="days"]').inputValue(), '0, 4, 7, 10, 14');
  assert.match(await page.locator('[data-region="size-state"]').innerText(), /changed/);
  await page.keyboard.press('ArrowLeft');
  // More studies add to what is there; a mistake is said beside its field.
  await page.locator('.size-run button').nth(1).click();
  await page.waitForFunction(() => document.querySelector('[data-region="size-paragraph"]')?.textContent?.includes('(120 studies'), null, { timeout: 60000 });
  await page.locator('[data-field="designs"]').fill('one');
  await page.click('[data-act="simulate"]');
  assert.match(await page.locator('.size-form .complaint:not(:empty)').first().innerText(), /2 to 2000/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('sample size: starts from the fitted table', async () => {
  const page = await openPage(browser);
  await enter(page, 'size');
  await page.click('[data-act="size-from-table"]');
  await page.waitForFunction(() => document.querySelector('[data-field="controlName"]')?.value === 'Plain gauze');
  assert.equal(await page.locator('[data-field="transform"]').inputValue(), 'log');
  assert.equal(await page.locator('[data-field="one"]').inputValue(), 'mouse');
  assert.deepEqual(page.problems, []);
  await page.context().close();
});
