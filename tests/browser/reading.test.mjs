/** The Data room: what it asks, and what it shows where a table cannot be used yet. */

import assert from 'node:assert/strict';
import { after, before, test } from 'node:test';
import { enter, findingsOf, launch, openPage, paste, rested, stateOf } from './harness.mjs';

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

const value = (s, t) => (50 - t * (s % 2 ? 3 : 1) + Math.sin(s * 5 + t) * 0.8).toFixed(2);
const DAYS = [0, 2, 4, 7, 10];
const rows = (count, id) => Array.from({ length: count }, (_, s) => DAYS.map((t) => [id(s), s % 2 ? 'Foam' : 'Gauze', t, value(s, t)])).flat();
const table = (lines) => [['mouse', 'dressing', 'day', 'area'], ...lines].map((line) => line.join(',')).join('\n');

test('a time that cannot be read: the table stays in view, the cell is marked, and leaving it out goes on', async () => {
  const page = await openPage(browser);
  const lines = rows(10, (s) => `m${s}`);
  lines[43][2] = 'soon';
  await paste(page, table(lines));
  await enter(page, 'data');
  assert.equal(await stateOf(page), 'problem');
  assert.equal(await page.locator('.preview td.is-stopping').innerText(), 'soon');
  await page.getByRole('button', { name: 'Leave line 45 out' }).first().click();
  await page.locator('.ask:not([hidden]) input').fill('no day written');
  await page.keyboard.press('Enter');
  await rested(page);
  assert.match(await stateOf(page), /ready|boundary/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('ids under every group: one question, and each answer has its consequence', async () => {
  const page = await openPage(browser);
  await paste(page, table(rows(12, (s) => Math.floor(s / 2) + 1)));
  assert.equal(await stateOf(page), 'question');
  assert.doesNotMatch(await findingsOf(page), /below|above/);
  await enter(page, 'data');
  await page.getByRole('button', { name: /The same subjects/ }).click();
  await rested(page);
  assert.equal(await stateOf(page), 'question');
  assert.match(await page.locator('[data-region="question"]:visible').innerText(), /crossover cannot be analysed/);
  await page.getByRole('button', { name: /A typing error/ }).click();
  await rested(page);
  assert.match(await page.locator('[data-region="problems"]').innerText(), /under another group too/);
  await page.getByRole('button', { name: /Different subjects/ }).click();
  await rested(page);
  assert.match(await stateOf(page), /ready|boundary/);
  await enter(page, 'courses');
  assert.match(await findingsOf(page), /below|above/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('a workbook: the sheet with the table is read, another can be chosen, and its cells', async () => {
  const page = await openPage(browser, { room: 'data' });
  const file = new URL('../../crates/courseband-table/tests/workbooks/plants.xlsx', import.meta.url).pathname;
  await page.setInputFiles('#table-file', file);
  await rested(page);
  assert.match(await stateOf(page), /ready|boundary/);
  assert.equal(await page.inputValue('[data-field="sheet"]'), 'Long & plain');
  assert.equal(await page.locator('.preview tbody tr').first().innerText(), '2\tp0\tearly\t2024-03-04\t10');
  await page.selectOption('[data-field="sheet"]', 'Wide');
  await rested(page);
  await page.fill('[data-field="cells"]', 'A1:G6');
  await page.keyboard.press('Enter');
  await rested(page);
  assert.match(await stateOf(page), /ready|boundary/);
  await page.fill('[data-field="cells"]', 'nonsense');
  await page.keyboard.press('Enter');
  await rested(page);
  assert.equal(await stateOf(page), 'problem');
  assert.match(await page.locator('[data-region="problem"]').innerText(), /no range of cells/);
  assert.deepEqual(page.problems, []);
  if (process.env.COURSEBAND_SHOTS) await page.screenshot({ path: `${process.env.COURSEBAND_SHOTS}/workbook.png`, fullPage: true });
  await page.context().close();
});

test('files that cannot be read are refused by what they are', async () => {
  const page = await openPage(browser, { room: 'data' });
  for (const [name, bytes, words] of [
    ['old.xls', [0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1], /older workbook/],
    ['half.xlsx', [0x50, 0x4B, 3, 4, 1, 2], /damaged/],
  ]) {
    await page.setInputFiles('#table-file', { name, mimeType: 'application/octet-stream', buffer: Buffer.from(bytes) });
    await rested(page);
    assert.equal(await stateOf(page), 'problem');
    assert.match(await page.locator('[data-region="problem"]').innerText(), words);
  }
  assert.deepEqual(page.problems, []);
  await page.context().close();
});
