/**
 * A browser and a page that tells everything that goes wrong in it.
 * `COURSEBAND_PAGE` is the address of the served page, `CHROMIUM` the browser.
 */

import { chromium } from 'playwright-core';

export const ADDRESS = process.env.COURSEBAND_PAGE ?? 'http://localhost:8127/';
const QUIET = [
  '--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking',
  '--disable-component-update', '--disable-sync',
];

export function launch() {
  return chromium.launch({ executablePath: process.env.CHROMIUM ?? '/usr/bin/chromium', args: QUIET });
}

/** Opens the page and waits until it rests. Problems are collected in `page.problems`. */
export async function openPage(browser, { width = 1440, height = 900, dark = false, room = 'courses', bypassCSP = false } = {}) {
  const context = await browser.newContext({
    viewport: { width, height }, colorScheme: dark ? 'dark' : 'light', bypassCSP,
  });
  const page = await context.newPage();
  page.problems = [];
  page.requests = [];
  page.on('console', (message) => {
    if (['error', 'warning'].includes(message.type())) page.problems.push(`console: ${message.text()}`);
  });
  page.on('pageerror', (error) => page.problems.push(`error: ${error.message}`));
  page.on('requestfailed', (request) => page.problems.push(`failed: ${request.url()}`));
  page.on('request', (request) => page.requests.push(request.url()));
  await page.goto(`${ADDRESS}#/${room}`);
  await rested(page);
  return page;
}

export const stateOf = (page) => page.evaluate(() => document.documentElement.dataset.state);

/** Waits until nothing is being read or fitted. */
export async function rested(page) {
  await page.waitForTimeout(150);
  await page.waitForFunction(
    () => ['ready', 'boundary', 'failed', 'problem', 'question', 'empty'].includes(document.documentElement.dataset.state ?? ''),
    null, { timeout: 30000 },
  );
  await page.waitForTimeout(100);
}

/** Goes to a room by its address, as a link does. */
export async function enter(page, room) {
  await page.goto(`${ADDRESS}#/${room}`);
  await rested(page);
}

export const findingsOf = (page) => page.locator('[data-region="findings"]').innerText();

/** Pastes a table in the Data room and goes to the courses. */
export async function paste(page, table) {
  await enter(page, 'data');
  await page.fill('[data-region="paste"] textarea', table);
  await page.waitForTimeout(400);
  await rested(page);
  await enter(page, 'courses');
}
