/** The page, used as a person uses it, in a real browser. */

import assert from 'node:assert/strict';
import { after, before, test } from 'node:test';
import { ADDRESS, enter, findingsOf, launch, openPage, paste, rested, stateOf } from './harness.mjs';

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

/** A made-up table: `b` falls away from `a` late. */
function made(line, head) {
  const rows = [head];
  for (let s = 0; s < 12; s += 1) rows.push(...line(s));
  return rows.join('\n');
}
const value = (s, t) => (30 + (s % 5) * 0.4 + Math.sin(s * 7 + t * 3) * 0.5 - (s % 2 ? Math.max(0, t - 4) * 1.5 : 0)).toFixed(2);
const LONG = made((s) => [0, 2, 4, 6, 8, 10].map((t) => `fish${s},${s % 2 ? 'warm' : 'cold'},${t},${value(s, t)}`), 'fish,tank water,week,length');
const WIDE = made((s) => [[`r${s}`, s % 2 ? 'late' : 'early', ...[0, 2, 4, 6, 8, 10].map((t) => value(s, t))].join('\t')], 'plant\tsowing\tday 0\tday 2\tday 4\tday 6\tday 8\tday 10');

test('opens on an invented example with findings, without complaints or foreign requests', async () => {
  const page = await openPage(browser);
  assert.match(await stateOf(page), /ready|boundary/);
  assert.match(await findingsOf(page), /runs below Plain gauze/);
  assert.match(await page.locator('body').innerText(), /[Ii]nvented/);
  assert.deepEqual(page.problems, []);
  for (const url of page.requests) assert.ok(url.startsWith(ADDRESS) || url.startsWith('blob:') || url.startsWith('data:'), url);
  await page.context().close();
});

test('first findings soon after a cold load', async (t) => {
  const context = await browser.newContext({ viewport: { width: 1440, height: 900 } });
  const page = await context.newPage();
  await page.goto(ADDRESS, { waitUntil: 'commit' });
  await page.waitForFunction(() => document.querySelector('[data-region="findings"]')?.textContent?.includes('runs below'), null, { polling: 20 });
  const ms = await page.evaluate(() => Math.round(performance.now()));
  t.diagnostic(`first findings ${ms} ms after the start of a cold load`);
  await context.close();
});

test('a pasted long table of an unknown kind gives findings', async () => {
  const page = await openPage(browser);
  await paste(page, LONG);
  assert.match(await findingsOf(page), /warm runs below cold|cold runs above warm/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('a pasted wide table gives findings', async () => {
  const page = await openPage(browser);
  await paste(page, WIDE);
  assert.match(await findingsOf(page), /late runs below early|early runs above late/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('one animal a group: the page draws, and claims no gap', async () => {
  const page = await openPage(browser);
  const rows = [0, 1].flatMap((s) => [0, 2, 4, 6, 8, 10, 12].map((t) => `m${s},${s ? 'b' : 'a'},${t},${value(s, t)}`));
  await paste(page, ['mouse,arm,day,score', ...rows].join('\n'));
  assert.match(await findingsOf(page), /cannot be compared/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('what is no table is said, and nothing is lost', async () => {
  const page = await openPage(browser);
  await enter(page, 'data');
  await page.fill('[data-region="paste"] textarea', 'hello world');
  await page.waitForTimeout(400);
  await rested(page);
  assert.equal(await stateOf(page), 'problem');
  assert.equal(await page.inputValue('[data-region="paste"] textarea'), 'hello world');
  await page.context().close();
});

test('a changed word of the plan changes the findings, and can be undone', async () => {
  const page = await openPage(browser);
  const first = await findingsOf(page);
  await page.click('[data-choice="shape"]');
  await page.click('[data-alternative="straight"]');
  await rested(page);
  const second = await findingsOf(page);
  assert.notEqual(second, first);
  await page.click('[data-region="change"] button');
  await rested(page);
  assert.equal(await findingsOf(page), first);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('by keyboard alone: a choice and the cursor', async () => {
  const page = await openPage(browser);
  const first = await findingsOf(page);
  await page.focus('[data-choice="shape"]');
  await page.keyboard.press('Enter');
  await page.keyboard.press('ArrowDown');
  await page.keyboard.press('Enter');
  await rested(page);
  assert.notEqual(await findingsOf(page), first);
  await page.focus('[role="slider"]');
  const before = await page.getAttribute('[role="slider"]', 'aria-valuetext');
  await page.keyboard.press('Home');
  await page.waitForTimeout(100);
  const atHome = await page.getAttribute('[role="slider"]', 'aria-valuetext');
  assert.notEqual(atHome, before);
  assert.match(atHome ?? '', /Plain gauze/);
  await page.context().close();
});

test('column names and cells are text, never markup', async () => {
  const page = await openPage(browser);
  await paste(page, LONG.replaceAll('warm', '<img src=x onerror=document.title=1>').replace('length', '<b>length</b>'));
  assert.equal(await page.locator('img:not(.report-figure), main b b').count(), 0);
  assert.notEqual(await page.title(), '1');
  await page.context().close();
});

test('the policy refuses the ways out', async () => {
  const page = await openPage(browser);
  const tried = await page.evaluate(async () => {
    const refused = {};
    try { await fetch('https://example.org/'); refused.fetch = false; } catch { refused.fetch = true; }
    try { new WebSocket('wss://example.org/').close(); } catch { /* refused at once */ }
    refused.image = await new Promise((done) => {
      const image = new Image();
      image.onerror = () => done(true);
      image.onload = () => done(false);
      image.src = 'https://example.org/a.png';
    });
    try { eval('1'); refused.eval = false; } catch { refused.eval = true; }
    return refused;
  });
  assert.deepEqual(tried, { fetch: true, image: true, eval: true });
  await page.context().close();
});

for (const [width, dark] of [[1440, false], [1440, true], [390, false], [390, true]]) {
  test(`no sideways scrolling at ${width} px, ${dark ? 'dark' : 'light'}`, async () => {
    const page = await openPage(browser, { width, height: width === 390 ? 844 : 900, dark });
    for (const room of ['courses', 'data']) {
      await enter(page, room);
      const over = await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
      assert.ok(over <= 0, `${room}: ${over} px`);
      if (process.env.COURSEBAND_SHOTS) {
        await page.screenshot({ path: `${process.env.COURSEBAND_SHOTS}/${room}-${width}-${dark ? 'dark' : 'light'}.png`, fullPage: true });
      }
    }
    assert.deepEqual(page.problems, []);
    await page.context().close();
  });
}

test('the margin is dragged on the gap strip, and moved by keys', async () => {
  const page = await openPage(browser, { height: 1300 });
  const grip = page.locator('.margin-grip');
  await grip.waitFor();
  const before = await grip.getAttribute('aria-valuetext');
  const { x, y } = await grip.boundingBox();
  await page.mouse.move(x + 12, y + 12);
  await page.mouse.down();
  await page.mouse.move(x + 12, y - 18, { steps: 4 });
  await page.mouse.up();
  await rested(page);
  const dragged = await grip.getAttribute('aria-valuetext');
  assert.notEqual(dragged, before);
  assert.match(await page.locator('.plan').innerText(), new RegExp(`a gap under ${dragged.replace('\u00b1', '')} of`));
  await grip.focus();
  await page.keyboard.press('Home');
  await rested(page);
  assert.equal(await grip.getAttribute('aria-valuetext'), 'every gap matters');
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('two crossed factors, rates and days to a level by plain choices', async () => {
  const page = await openPage(browser);
  const rows = ['mouse,treatment,genotype,day,size'];
  let seed = 5;
  const noise = () => { seed = (seed * 16807) % 2147483647; return (4 * seed) / 2147483647 - 2; };
  ['vehicle', 'compound'].forEach((arm, a) => ['wild', 'mutant'].forEach((kind, k) => {
    for (let s = 0; s < 6; s += 1) {
      for (let day = 0; day < 6; day += 1) rows.push(`m${a}${k}${s},${arm},${kind},${day},${(10 + 3 * day - (a && k ? 2.5 * day : 0) + noise()).toFixed(2)}`);
    }
  }));
  await paste(page, rows.join('\n'));
  await enter(page, 'courses');
  const choose = async (choice, alternative) => {
    await page.locator(`[data-choice="${choice}"]`).click();
    await page.locator(`[data-alternative="${alternative}"]`).click();
    await rested(page);
  };
  await page.getByRole('button', { name: 'finer choices' }).click();
  await choose('crossed', 'column:genotype');
  assert.match(await findingsOf(page), /compound against vehicle in mutant differs from compound against vehicle in wild/);
  await choose('also', 'rates');
  await page.locator('[data-choice="also"]').click();
  await page.fill('[data-field="target"]', '20');
  await page.waitForTimeout(700);
  await rested(page);
  await page.keyboard.press('Escape');
  await page.locator('[data-region="effects"] summary, .as-tables summary').first().click();
  assert.match(await page.locator('main').innerText(), /first reaches 20/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});

test('shares of a total: the values suggest a distribution, the total is named, odds and points are told', async () => {
  const page = await openPage(browser);
  const rows = ['plate,soil,day,germinated,seeds'];
  let seed = 3;
  const uniform = () => { seed = (seed * 16807) % 2147483647; return seed / 2147483647; };
  for (let p = 0; p < 14; p += 1) {
    for (let day = 1; day < 6; day += 1) {
      const chance = 1 / (1 + Math.exp(2 - 0.5 * day - (p % 2) * 0.4 * day));
      rows.push(`p${p},${p % 2 ? 'loam' : 'sand'},${day},${Array.from({ length: 12 }, uniform).filter((u) => u < chance).length},12`);
    }
  }
  await paste(page, rows.join('\n'));
  await enter(page, 'courses');
  assert.match(await page.locator('[data-region="proposal-of-values"]').innerText(), /whole numbers from .* counts/);
  await page.getByRole('button', { name: 'finer choices' }).click();
  await page.locator('[data-choice="distribution"]').click();
  await page.locator('[data-alternative="binomial"]').click();
  await page.waitForTimeout(600);
  await page.locator('[data-choice="distribution"]').click();
  await page.selectOption('[data-field="total"]', 'seeds');
  await page.waitForFunction(() => /percentage points/.test(document.querySelector('[data-region="findings"]')?.textContent ?? ''));
  assert.match(await findingsOf(page), /the odds in loam are/);
  assert.deepEqual(page.problems, []);
  await page.context().close();
});
