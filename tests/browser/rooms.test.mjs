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
  // What each would change stands above all, with its stretches on the time axis; its name leads to it, focus and all.
  // Articles come one a frame.
  await page.waitForFunction(() => document.querySelectorAll('.check').length > 4
    && document.querySelectorAll('.verdict-strip li').length === document.querySelectorAll('.check').length);
  assert.ok(await count(page, '.verdict-strip .stake-lane') > 4);
  await page.locator('.verdict-strip [data-key="serial"] button').click();
  assert.equal(await page.evaluate(() => document.activeElement?.id), 'check-serial');
  assert.equal(await count(page, '[data-key="serial"].check .small-plot'), 2);
  // A trial that leaves rows out is a choice like any other, and is taken back with them.
  await page.click('[data-act="try-influence"]');
  await rested(page);
  await page.waitForFunction(() => /out/.test(document.querySelector('.room-checks .change')?.textContent ?? '') || document.querySelector('.room-checks .change button'));
  await enter(page, 'data');
  assert.ok((await page.locator('main').innerText()).includes('Left out to see what it changes.'));
  await enter(page, 'checks');
  await page.locator('.room-checks .change button').click();
  await rested(page);
  await enter(page, 'data');
  assert.ok(!(await page.locator('main').innerText()).includes('Left out to see what it changes.'));
  await enter(page, 'checks');
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
  // Straight lines over the courses strip, until they are taken away.
  await page.click('[data-act="lay-over"]');
  await page.waitForSelector('[data-act="over-away"]');
  assert.match(await page.locator('.strips-over').innerText(), /straight/i);
  const with_ = await page.locator('.strips-drawing').evaluate((canvas) => canvas.toDataURL());
  await page.click('[data-act="over-away"]');
  await page.waitForTimeout(100);
  assert.notEqual(await page.locator('.strips-drawing').evaluate((canvas) => canvas.toDataURL()), with_);
  await enter(page, 'usual');
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

test('report: composed, rewritten, exported, and reopened to the same digits', async () => {
  const page = await openPage(browser);
  await page.waitForFunction(() => document.documentElement.dataset.bands === 'calibrated', null, { timeout: 60000 });
  await enter(page, 'report');
  await page.waitForSelector('[data-section="methods"]');
  const methods = await page.locator('[data-section="methods"]').innerText();
  assert.match(methods, /restricted maximum likelihood/);
  assert.match(methods, /1000 simulated tables/);
  assert.match(await page.locator('[data-section="data"]').innerText(), /invented example/);
  // A paragraph is rewritten; undo brings the composed one back.
  const first = page.locator('[data-paragraph="question.0"]');
  await first.locator('button').first().click();
  await first.locator('textarea').fill('Do dressings matter?');
  await first.locator('button').first().click();
  assert.match(await first.innerText(), /Do dressings matter/);
  // What is saved.
  const saved = async (act) => {
    const [download] = await Promise.all([page.waitForEvent('download'), page.click(`[data-act="${act}"]`)]);
    const { readFile } = await import('node:fs/promises');
    return { name: download.suggestedFilename(), bytes: await readFile(await download.path()) };
  };
  const figure = await saved('save-svg');
  assert.match(figure.name, /invented\.svg$/);
  assert.match(figure.bytes.toString(), /^<svg[\s\S]*<\/svg>\s*$/);
  const picture = await saved('save-png');
  assert.equal(picture.bytes.subarray(1, 4).toString(), 'PNG');
  // 170 mm at 300 dots per inch.
  assert.ok(Math.abs(picture.bytes.readUInt32BE(16) - 2008) <= 6, String(picture.bytes.readUInt32BE(16)));
  const html = await saved('save-html');
  assert.match(html.bytes.toString(), /Do dressings matter\?/);
  const gaps = page.locator('summary', { hasText: 'Gaps at the visits' });
  await gaps.click();
  assert.match((await saved('csv-gaps')).bytes.toString(), /Gel film,Plain gauze,0,/);
  await enter(page, 'courses');
  const before = await page.locator('[data-region="findings"]').innerText();
  await enter(page, 'report');
  const analysis = await saved('save-analysis');
  // Another visit to the page reopens it.
  const again = await openPage(browser, { room: 'data' });
  await again.setInputFiles('#table-file', { name: analysis.name, mimeType: 'application/json', buffer: analysis.bytes });
  await rested(again);
  await enter(again, 'courses');
  await again.waitForFunction(() => document.documentElement.dataset.bands === 'calibrated', null, { timeout: 60000 });
  assert.equal(await again.locator('[data-region="findings"]').innerText(), before);
  await enter(again, 'report');
  await again.waitForFunction(() => document.querySelector('[data-paragraph="question.0"]')?.textContent?.includes('Do dressings matter?'));
  // Without its table it asks for the right one.
  await enter(page, 'report');
  const plan = await saved('save-plan');
  await enter(again, 'data');
  await again.fill('[data-region="paste"] textarea', 'who,day,arm,y\na,0,x,1\na,1,x,2\nb,0,z,2\nb,1,z,4\nc,0,x,2\nc,1,x,2.5\nd,0,z,3\nd,1,z,6');
  await again.waitForTimeout(500);
  await rested(again);
  await again.setInputFiles('#table-file', { name: plan.name, mimeType: 'application/json', buffer: plan.bytes });
  await again.waitForFunction(() => document.querySelector('[data-region="message"]')?.textContent?.includes('fingerprint differs'));
  assert.deepEqual([...page.problems, ...again.problems], []);
  await page.context().close();
  await again.context().close();
});

test('other models: laid over the plan, one can be used and taken back', async () => {
  const page = await openPage(browser);
  await enter(page, 'checks');
  await page.waitForSelector('.check');
  const began = Date.now();
  await page.click('[data-act="candidates"]');
  await page.waitForSelector('.candidate');
  assert.ok(Date.now() - began < 20000);
  assert.ok(await count(page, '.candidate') >= 8);
  assert.match(await page.locator('[data-region="proposal"]').innerText(), /plan/);
  const straight = page.locator('.candidate', { hasText: 'Straight courses' });
  assert.match(await straight.innerText(), /foresees new subjects worse.*gaps move by at most/i);
  await straight.locator('button').click();
  await rested(page);
  await enter(page, 'courses');
  assert.match(await page.locator('.plan').innerText(), /straight/);
  
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('dropout: who leaves is said, and a shift takes the conclusion away', async () => {
  const page = await openPage(browser);
  await enter(page, 'dropout');
  await page.waitForSelector('[data-region="dropout"] p');
  assert.match(await page.locator('[data-region="dropout"]').innerText(), /Before the last visit leave: .* of 12 in Plain gauze/);
  await page.fill('[data-field="delta-from"]', '-0.5');
  await page.fill('[data-field="delta-to"]', '0.5');
  await page.fill('[data-field="delta-step"]', '0.5');
  await page.fill('[data-field="tables"]', '10');
  await page.click('[data-act="sensitivity"]');
  await page.waitForFunction(() => document.querySelector('[data-region="sensitivity-state"]')?.textContent === '' && document.querySelectorAll('.tipping').length > 0, null, { timeout: 60000 });
  assert.match(await page.locator('.tipping').first().innerText(), /conclusion (is lost|stands)/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('effect sizes: folded under the strips, each with its interval', async () => {
  const page = await openPage(browser);
  await page.click('[data-region="effects"] summary');
  const shown = await page.locator('[data-region="effects"]').innerText();
  assert.match(shown, /gap at day 21\s+0\.5\d\s+0\.4\d to 0\.7\d/);
  assert.match(shown, /time to halve/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('dropout: removal marked by hand, and the days to a level', async () => {
  const page = await openPage(browser);
  await enter(page, 'dropout');
  await page.waitForSelector('.dropout-plots summary');
  await page.fill('[data-field="level-sought"]', '20');
  await page.waitForTimeout(700);
  await rested(page);
  await page.waitForFunction(() => /Have reached 20/.test(document.querySelector('[data-region="dropout"]')?.textContent ?? ''));
  await page.locator('.dropout-plots summary').first().click();
  await page.locator('.dropout-plots input[type=checkbox]').first().check();
  await page.waitForFunction(() => /Removed as planned, as seen at visits: .*1 of/.test(document.querySelector('[data-region="dropout"]')?.textContent ?? ''));
  assert.deepEqual(page.problems, []);
  await page.context().close();
});
