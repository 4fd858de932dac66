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
  const text = await saved(page, 'save-docx');
  assert.match(text.name, /\.docx$/);
  const inside = text.bytes.toString('latin1');
  assert.ok(inside.includes('word/document.xml') && inside.includes('word/media/figure.png') && inside.includes('restricted maximum likelihood'));
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
  const results = await page.locator('[data-region="markers"] tbody tr').evaluateAll((rows) => rows.map((row) => `${row.children[0].textContent}: ${row.children[1].textContent}`));
  assert.equal(results[0], 'up: found');
  assert.match(results[3], /^patchy: no result: ./);
  const csv = (await saved(page, 'csv-responses')).bytes.toString();
  assert.match(csv, /up,found,'=SUM\(1\),Saline,/);
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
  // What is given out says it too.
  await page.waitForFunction(() => document.documentElement.dataset.bands === 'calibrated', null, { timeout: 90000 });
  const html = (await saved(page, 'save-html')).bytes.toString();
  assert.match(html, /Of 4 response columns 3 could be tested/);
  assert.match(html, /no result: /);
  // Another table: its own columns, and nothing of the one before.
  await paste(page, panel().split('\n').map((row) => row.split(',').slice(0, 5).join(',')).join('\n').replace('same', 'other'));
  await enter(page, 'data');
  if (await page.evaluate(() => document.documentElement.dataset.state) === 'question') await page.locator('[data-region="question"] button').first().click();
  await rested(page);
  await enter(page, 'report');
  await page.waitForFunction(() => Array.from(document.querySelectorAll('.marker-columns label'), (label) => label.innerText).join() === 'up,other');
  assert.equal(await page.locator('.marker-sentence').count(), 0);
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
  // Saved by another version: said. Changed on the way: refused.
  const text = whole.bytes.toString();
  const reopen = async (json) => again.setInputFiles('#table-file', { name: 'a.json', mimeType: 'application/json', buffer: Buffer.from(json) });
  await enter(again, 'data');
  await reopen(text.replace(/"courseband": "[^"]*"/, '"courseband": "0.0.9"'));
  await again.waitForFunction(() => /saved by version 0\.0\.9; this is/.test(document.body.innerText));
  await reopen(text.replace(/"base64": "...../, '"base64": "AAAAA'));
  await again.waitForFunction(() => /changed or damaged/.test(document.body.innerText));
  assert.deepEqual([...page.problems, ...again.problems], []);
  await page.context().close();
  await again.context().close();
});

test('the figure: choices are seen in it, undone, kept in the analysis; PDF has lines and text', async () => {
  const page = await openPage(browser);
  await page.waitForFunction(() => document.documentElement.dataset.bands === 'calibrated', null, { timeout: 90000 });
  await enter(page, 'report');
  await page.waitForSelector('[data-act="save-svg"]:not([disabled])');
  const svg = async () => (await saved(page, 'save-svg')).bytes.toString();
  const whole = await svg();
  assert.match(whole, /Followed/);
  await page.locator('.figure-choices > summary').click();
  await page.uncheck('[data-figure="followed"]');
  await page.uncheck('[data-figure="points"]');
  await page.fill('[data-field="value-title"]', 'Area in mm²');
  await page.fill('[data-group="Plain gauze"]', 'Control');
  await page.locator('[data-up="Plain gauze"]').click();
  const changed = await svg();
  assert.doesNotMatch(changed, /Followed|Plain gauze|wound area/);
  assert.match(changed, /Area in mm²/);
  assert.match(changed, /Control/);
  assert.ok(changed.length < 0.9 * whole.length, `${changed.length} of ${whole.length}`);
  // The order is that of the labels' colours: the first colour of the print palette is now another group's.
  assert.deepEqual(await page.locator('.figure-groups input').evaluateAll((all) => all.map((input) => input.dataset.group)).then((all) => all.length), 3);
  const pdf = (await saved(page, 'save-pdf')).bytes.toString('latin1');
  assert.match(pdf, /^%PDF-1\.4/);
  assert.doesNotMatch(pdf, /\/Image/);
  const hex = (text) => Array.from(text, (letter) => letter.charCodeAt(0).toString(16).toUpperCase().padStart(2, '0')).join('');
  assert.ok(pdf.includes(hex('Control')) && pdf.includes(hex('Area')) && !pdf.includes(hex('Followed')));
  // 170 mm are 482 points; the figure may end on a whole pixel.
  const [, points] = /\/MediaBox \[0 0 ([\d.]+) /.exec(pdf);
  assert.ok(Math.abs(Number(points) - 481.9) < 1.5, points);
  // Letters that a PDF reader lacks are named, and nothing is saved.
  await page.fill('[data-group="Gel film"]', '水');
  await page.click('[data-act="save-pdf"]');
  await page.waitForFunction(() => /‘水’.*SVG/.test(document.querySelector('[data-region="figure-state"]').textContent));
  await page.fill('[data-group="Gel film"]', 'Control');
  assert.match(await page.locator('.figure-choices .complaint').innerText(), /Two groups would be called/);
  // Undo takes figure choices back one by one.
  await page.locator('.room-report .room-head h2').click();
  for (let k = 0; k < 8; k += 1) await page.keyboard.press('Control+z');
  await page.waitForFunction(() => document.querySelector('[data-figure="followed"]').checked);
  assert.equal(await svg(), whole);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('the exported SVG, as a renderer of pictures shows it, is the canvas of the page', async () => {
  const page = await openPage(browser, { bypassCSP: true });
  const apart = await page.evaluate(async () => {
    const table = await (await fetch('./demo-data/wounds.csv')).text();
    const session = new wasm_bindgen.Session();
    session.open(new TextEncoder().encode(table));
    const plan = JSON.stringify({ response: { transform: 'log' }, comparisons: { small_sample: 'df', margin: 10, margin_unit: 'percent' } });
    const [findings, traces] = [session.run(plan), session.traces()];
    const look = { width: 700, ratio: 2, head_room: 24, theme: 'print', noun: 'mice', letters: false, font: 12 };
    const canvas = document.createElement('canvas');
    wasm_bindgen.draw_strips(canvas, findings, traces, JSON.stringify(look));
    const image = new Image();
    image.src = `data:image/svg+xml;charset=utf-8,${encodeURIComponent(wasm_bindgen.strips_svg(findings, traces, JSON.stringify({ ...look, ratio: 1 })))}`;
    await image.decode();
    const other = document.createElement('canvas');
    [other.width, other.height] = [canvas.width, canvas.height];
    other.getContext('2d').drawImage(image, 0, 0, canvas.width, canvas.height);
    const pixels = (one) => one.getContext('2d').getImageData(0, 0, canvas.width, canvas.height).data;
    const [a, b] = [pixels(canvas), pixels(other)];
    // Means of blocks of 8 x 8 device pixels: edges may fall on neighbouring pixels.
    const block = 8;
    let [sum, worst, blocks, inked] = [0, 0, 0, 0];
    for (let y = 0; y + block <= canvas.height; y += block) {
      for (let x = 0; x + block <= canvas.width; x += block) {
        let [one, two] = [0, 0];
        for (let dy = 0; dy < block; dy += 1) {
          for (let dx = 0; dx < block; dx += 1) {
            const at = 4 * ((y + dy) * canvas.width + x + dx);
            one += a[at] + a[at + 1] + a[at + 2];
            two += b[at] + b[at + 1] + b[at + 2];
          }
        }
        const gap = Math.abs(one - two) / (3 * block * block);
        sum += gap;
        worst = Math.max(worst, gap);
        blocks += 1;
        inked += one < 3 * 250 * block * block ? 1 : 0;
      }
    }
    return { mean: sum / blocks, worst, inked: inked / blocks, size: [canvas.width, canvas.height, image.naturalWidth, image.naturalHeight] };
  });
  assert.ok(apart.inked > 0.15, JSON.stringify(apart));
  // Of 255. A strip, a band or a curve out of place would give a worst block of 60 and more.
  assert.ok(apart.mean < 1.5 && apart.worst < 60, JSON.stringify(apart));
  await page.context().close();
});

test('100 subjects with 40 visits: the cursor is read within a frame', async () => {
  const page = await openPage(browser);
  let seed = 5;
  const random = () => { seed = (seed * 16807) % 2147483647; return seed / 2147483647 - 0.5; };
  const rows = ['id,arm,day,size'];
  for (let s = 0; s < 100; s += 1) for (let day = 0; day < 40; day += 1) rows.push(`s${s},${s % 2 ? 'b' : 'a'},${day},${(10 + 0.05 * day * (s % 2) + random()).toFixed(3)}`);
  await enter(page, 'data');
  await page.evaluate((table) => {
    const box = document.querySelector('#paste-box');
    box.value = table;
    box.dispatchEvent(new Event('input', { bubbles: true }));
  }, rows.join('\n'));
  await page.waitForFunction(() => document.querySelector('[data-region="invented"]').hidden);
  await rested(page);
  await enter(page, 'courses');
  await page.waitForFunction(() => document.documentElement.dataset.bands === 'calibrated', null, { timeout: 180000 });
  const times = await page.evaluate(async () => {
    const slider = document.querySelector('[role="slider"]');
    const { left, width, top, height } = slider.getBoundingClientRect();
    const found = [];
    for (let k = 0; k < 60; k += 1) {
      const started = performance.now();
      const move = { bubbles: true, clientX: left + ((k * 37) % 100) / 100 * width, clientY: top + height / 2, pointerType: 'mouse' };
      slider.dispatchEvent(new PointerEvent('pointermove', move));
      // The state is shown in a microtask; layout is forced by asking for it.
      await Promise.resolve();
      await Promise.resolve();
      document.body.getBoundingClientRect();
      found.push(performance.now() - started);
    }
    const texts = slider.getAttribute('aria-valuetext');
    return { found: found.sort((a, b) => a - b), texts };
  });
  assert.ok(times.texts);
  const [middle, late] = [times.found[30], times.found[56]];
  assert.ok(middle < 16 && late < 32, `middle ${middle} ms, 95 % ${late} ms`);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});
