/** WCAG 2.2 AA by an automated checker (axe-core), in every room, light and dark. */

import assert from 'node:assert/strict';
import { readFile } from 'node:fs/promises';
import { createRequire } from 'node:module';
import { after, before, test } from 'node:test';
import { launch, openPage } from './harness.mjs';

const checker = await readFile(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');
const RULES = ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'];

let browser;
before(async () => { browser = await launch(); });
after(async () => { await browser?.close(); });

for (const room of ['courses', 'data', 'checks', 'usual', 'dropout', 'size', 'report']) {
  for (const dark of [false, true]) {
    test(`${room}, ${dark ? 'dark' : 'light'}`, async () => {
      // The checker is put into the page, which the page's own policy would refuse.
      const page = await openPage(browser, { room, dark, bypassCSP: true });
      await page.addScriptTag({ content: checker });
      const found = await page.evaluate(async (rules) => {
        const { violations } = await window.axe.run(document, { runOnly: rules });
        return violations.map((v) => `${v.id}: ${v.nodes.map((n) => n.target).join(' ')}`);
      }, RULES);
      assert.deepEqual(found, []);
      await page.context().close();
    });
  }
}
