/** What is given out, kept, masked and taken back, used as a person uses it. */

import assert from 'node:assert/strict';
import { readFile } from 'node:fs/promises';
import { after, before, test } from 'node:test';
import { enter, findingsOf, launch, openPage, paste, rested } from './harness.mjs';

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

const saved = async (page, act) => {
  const [download] = await Promise.all([page.waitForEvent('download'), page.click(`[data-act="${act}"]`)]);
  return { name: download.suggestedFilename(), bytes: await readFile(await download.path()) };
};

/** 16 animals, two arms; `up` differs, `same` and `still` do not, `patchy` cannot be fitted. */
function panel() {
  let seed = 11;
  const random = () => { seed = (seed * 16807) % 2147483647; return seed / 2147483647 - 0.5; };
  const rows = ['mouse,arm,day,up,same,still,patchy'];
  for (let s = 0; s < 16; s += 1) {
    for (let day = 0; day < 6; day += 1) {
      const gap = s % 2 ? 0.8 * day : 0;
      rows.push(`m${s},${s % 2 ? '=SUM(1)' : 'Saline'},${day},${(10 + gap + random()).toFixed(3)},${(5 + random()).toFixed(3)},${(7 + random()).toFixed(3)},${s === 0 && day < 4 ? day * day : ''}`);
    }
  }
  return rows.join('\n');
}

async function openPanel(page) {
  await paste(page, panel());
  await enter(page, 'data');
  if (await page.evaluate(() => document.documentElement.dataset.state) === 'question') {
    await page.locator('[data-region="question"] button').first().click();
    await rested(page);
  }
}

test('tables as a workbook that opens again here; one row per subject; no formula in the CSV', async () => {
  const page = await openPage(browser);
  await openPanel(page);
  await enter(page, 'report');
  await page.waitForSelector('[data-act="save-xlsx"]:not([disabled])', { timeout: 60000 });
  await page.waitForFunction(() => document.documentElement.dataset.bands === 'calibrated', null, { timeout: 90000 });
  await page.waitForSelector('[data-act="save-xlsx"]:not([disabled])');
  const book = await saved(page, 'save-xlsx');
  assert.match(book.name, /-tables\.xlsx$/);
  assert.equal(book.bytes.subarray(0, 2).toString(), 'PK');
  assert.doesNotMatch(book.bytes.toString('latin1'), /<f[ >]/);
  await page.locator('summary', { hasText: 'by subject' }).click();
  const csv = (await saved(page, 'csv-subjects')).bytes.toString();
  assert.equal(csv.trim().split('\r\n').length, 17);
  assert.match(csv, /m1,'=SUM\(1\),6,0,5,/);
  // The page reads its own workbook.
  await enter(page, 'data');
  await page.setInputFiles('#table-file', { name: book.name, mimeType: 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet', buffer: book.bytes });
  await rested(page);
  const sheets = await page.locator('.sheet-choice select').first().locator('option').allInnerTexts();
  assert.ok(sheets.includes('Subjects') && sheets.includes('Gaps'), sheets.join());
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('many response columns: found, not found and failed are told apart; it can be stopped', async () => {
  const page = await openPage(browser);
  await openPanel(page);
  await enter(page, 'report');
  await page.locator('[data-region="markers-part"] > summary').click();
  await page.waitForSelector('.marker-columns input');
  assert.deepEqual(await page.locator('.marker-columns label').allInnerTexts(), ['up', 'same', 'still', 'patchy']);
  await page.click('[data-act="run-markers"]');
  await page.waitForSelector('.marker-sentence', { timeout: 60000 });
  assert.match(await page.locator('.marker-sentence').innerText(), /Of 4 response columns 3 could be tested\. In one do courses come apart at a false-discovery rate of 5.%: up\. One gave no result/);
  const results = await page.locator('[data-region="markers"] tbody tr').evaluateAll((rows) => rows.map((row) => `${row.firstChild.textContent}: ${row.lastChild.textContent}`));
  assert.equal(results[0], 'up: found');
  assert.match(results[3], /^patchy: no result: ./);
  const csv = (await saved(page, 'csv-responses')).bytes.toString();
  assert.match(csv, /up,'=SUM\(1\),Saline,/);
  // Another choice: the answer is of another plan, and says so.
  await page.fill('[data-field="marker-rate"]', '0');
  await page.click('[data-act="run-markers"]');
  assert.match(await page.locator('[data-region="markers-state"]').innerText(), /above 0/);
  await page.fill('[data-field="marker-rate"]', '10');
  await page.click('[data-act="run-markers"]');
  await page.evaluate(() => document.querySelector('[data-act="stop-markers"]').click());
  await page.waitForFunction(() => /Stopped/.test(document.querySelector('[data-region="markers-state"]').textContent));
  await page.click('[data-act="run-markers"]');
  await page.waitForSelector('.marker-sentence', { timeout: 60000 });
  assert.match(await page.locator('.marker-sentence').innerText(), /rate of 10.%/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('nothing is kept unasked; asked, it comes back to the same findings; erased, it is gone', async () => {
  const page = await openPage(browser);
  const stores = () => page.evaluate(async () => [JSON.stringify({ ...localStorage }), JSON.stringify(await indexedDB.databases())]);
  await openPanel(page);
  await enter(page, 'courses');
  const before = await findingsOf(page);
  assert.deepEqual(await stores(), ['{}', '[]']);
  await enter(page, 'data');
  await page.locator('[data-region="keeping"] summary').click();
  await page.check('[data-act="keep-work"]');
  await page.waitForFunction(() => /^Kept on this device at/.test(document.querySelector('[data-region="keeping-state"]').textContent));
  // Another visit: an offer, and no table until it is taken.
  const again = await page.context().newPage();
  await again.goto(page.url().replace(/#.*/, '#/courses'));
  await rested(again);
  await again.locator('[data-act="open-kept"]').click();
  await again.waitForFunction(() => document.querySelector('[data-region="invented"]').hidden);
  await rested(again);
  assert.equal((await findingsOf(again)).replace(/provisional/g, ''), before.replace(/provisional/g, ''));
  assert.ok(await again.locator('[data-region="kept"]').isHidden());
  await again.close();
  await page.click('[data-act="erase-work"]');
  await page.waitForFunction(() => /^Erased/.test(document.querySelector('[data-region="keeping-state"]').textContent));
  assert.deepEqual(await stores(), ['{}', '[]']);
  assert.equal(await page.isChecked('[data-act="keep-work"]'), false);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('no storage, or a full one, is said', async () => {
  const page = await openPage(browser);
  await openPanel(page);
  await page.locator('[data-region="keeping"] summary').click();
  await page.evaluate(() => { window.realPut = IDBObjectStore.prototype.put; IDBObjectStore.prototype.put = () => { throw new DOMException('full', 'QuotaExceededError'); }; });
  await page.check('[data-act="keep-work"]');
  await page.waitForFunction(() => /storage that the browser gives is full/.test(document.querySelector('[data-region="keeping-state"]').textContent));
  await page.click('[data-act="erase-work"]');
  await page.evaluate(() => { IDBFactory.prototype.open = () => { throw new DOMException('no', 'SecurityError'); }; });
  await page.locator('[data-act="keep-work"]').click();
  await page.waitForFunction(() => /gives this page no storage/.test(document.querySelector('[data-region="keeping-state"]').textContent));
  assert.equal(await page.isChecked('[data-act="keep-work"]'), false);
  assert.equal(await page.evaluate(() => localStorage.length), 0);
  await page.context().close();
});

test('group names masked: nowhere in sight, rows left out so are marked, and undo shows them', async () => {
  const page = await openPage(browser);
  await openPanel(page);
  await page.click('[data-act="mask-groups"]');
  await rested(page);
  await page.waitForFunction(() => /Group [AB]/.test(document.querySelector('[data-region="description"]').textContent));
  for (const room of ['data', 'courses', 'report', 'dropout', 'checks', 'usual', 'size']) {
    await enter(page, room);
    await page.waitForTimeout(600);
    assert.doesNotMatch(await page.evaluate(() => document.querySelector('main').innerText), /Saline|=SUM/, room);
  }
  await enter(page, 'data');
  await page.locator('.other-row summary').click();
  await page.fill('[data-field="leave-out"]', '5');
  await page.locator('.other-row button').first().click();
  await page.locator('.other-row form input').fill('cage flooded');
  await page.keyboard.press('Enter');
  await rested(page);
  assert.match(await page.locator('[data-region="left-out"]').innerText(), /with group names masked/);
  await enter(page, 'report');
  await page.waitForFunction(() => /line 5 \(cage flooded.*names masked\)/.test(document.querySelector('[data-section="data"]')?.textContent ?? ''));
  // Two choices taken back by keys, and one done again.
  await page.evaluate(() => document.activeElement?.blur());
  await page.keyboard.press('Control+z');
  await page.keyboard.press('Control+z');
  await rested(page);
  await enter(page, 'data');
  await page.waitForFunction(() => /Saline/.test(document.querySelector('[data-region="table"]').innerText));
  await page.keyboard.press('Control+Shift+z');
  await rested(page);
  assert.doesNotMatch(await page.locator('[data-region="table"]').innerText(), /Saline/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('a plan that is fixed is saved, and its departures outlive a reopening', async () => {
  const page = await openPage(browser);
  await openPanel(page);
  await enter(page, 'report');
  const plan = await saved(page, 'fix-plan');
  assert.match(plan.name, /-plan\.courseband\.json$/);
  assert.equal(JSON.parse(plan.bytes.toString()).table.base64, null);
  await enter(page, 'courses');
  await page.click('[data-choice="shape"]');
  await page.click('[data-alternative="straight"]');
  await rested(page);
  await enter(page, 'report');
  await page.waitForFunction(() => /curves\.shape/.test(document.querySelector('[data-region="departures"]').textContent));
  const whole = await saved(page, 'save-analysis');
  const again = await openPage(browser, { room: 'data' });
  await again.setInputFiles('#table-file', { name: whole.name, mimeType: 'application/json', buffer: whole.bytes });
  await rested(again);
  await enter(again, 'report');
  await again.waitForFunction(() => /curves\.shape/.test(document.querySelector('[data-region="departures"]').textContent));
  assert.deepEqual([...page.problems, ...again.problems], []);
  await page.context().close();
  await again.context().close();
});
