/** Every room enlarged, on paper, and with reduced motion. */

import assert from 'node:assert/strict';
import { after, before, test } from 'node:test';
import { enter, launch, openPage } from './harness.mjs';

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

const rooms = (page) => page.locator('.rooms-links a').evaluateAll((links) => links.map((link) => link.getAttribute('href').slice(2)));

// 1280 px at 200 % and at 400 % (WCAG 1.4.4, 1.4.10).
for (const [width, height] of [[640, 400], [320, 256]]) {
  test(`enlarged to ${width} px: nothing scrolls sideways, and what has the focus is in sight`, async () => {
    const page = await openPage(browser, { width, height });
    await page.emulateMedia({ reducedMotion: 'reduce' });
    for (const room of await rooms(page)) {
      await enter(page, room);
      await page.waitForTimeout(400);
      const over = await page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
      assert.ok(over <= 0, `${room}: ${over} px`);
      assert.equal(await page.evaluate(() => document.getAnimations().length), 0);
      const hidden = await page.evaluate(() => {
        const found = [];
        for (const node of document.querySelectorAll('main :is(button, a[href], input, select, summary)')) {
          if (!node.checkVisibility() || node.disabled || node.closest('[class*="unseen"]') || node.type === 'file') continue;
          node.focus();
          if (document.activeElement !== node) continue;
          const { left, top, width: w, height: h } = node.getBoundingClientRect();
          const there = document.elementFromPoint(left + w / 2, top + h / 2);
          if (there && !node.contains(there) && !there.contains(node)) found.push(`${node.tagName} ${node.className} ${node.textContent.slice(0, 20)}`);
        }
        return found;
      });
      assert.deepEqual(hidden, [], room);
    }
    assert.deepEqual(page.problems, []);
    await page.context().close();
  });
}

test('on paper: no control is left, colours are those for white, also from a dark page', async () => {
  const page = await openPage(browser, { width: 680, height: 1000, dark: true });
  for (const room of await rooms(page)) {
    await page.emulateMedia({ media: 'screen' });
    await enter(page, room);
    await page.waitForTimeout(400);
    await page.emulateMedia({ media: 'print' });
    const seen = await page.evaluate(() => {
      const shown = (selector) => Array.from(document.querySelectorAll(selector)).filter((node) => node.checkVisibility());
      // Words of the plan, names of checks and analyses, and days on the axis are text that happens to be pressed.
      const words = '.choice, .verdict-strip button, .asked-for button, .day-knob, .open-strip';
      const root = getComputedStyle(document.documentElement);
      return {
        buttons: shown('button').filter((node) => !node.matches(words)).map((node) => node.textContent),
        cut: shown('main *').filter((node) => node.scrollHeight > node.clientHeight + 2 && /auto|scroll/.test(getComputedStyle(node).overflowY)).map((node) => node.className),
        framed: shown('main :is(input, select)').filter((node) => getComputedStyle(node).borderTopWidth !== '0px').length,
        over: document.documentElement.scrollWidth - document.documentElement.clientWidth,
        colours: [root.getPropertyValue('--paper'), root.getPropertyValue('--group-1')],
      };
    });
    assert.deepEqual(seen, { buttons: [], cut: [], framed: 0, over: 0, colours: ['#fff', '#231c22'] }, room);
  }
  await page.context().close();
});
