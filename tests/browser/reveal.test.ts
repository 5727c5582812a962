import type { Page } from 'playwright-core';
import { expect, test } from 'vitest';
import type { Revealed } from '../../shared/api/passphrases.ts';
import { openWindow, settled, signIn } from '../support/browser.ts';
import { useDemo } from './demo.ts';
import { placesToLook } from './places.ts';

const demo = useDemo();

/** Shows the passphrase of the open network's page; answers what the server gave. */
async function show(page: Page): Promise<string> {
  const answered = page.waitForResponse((response) => response.url().endsWith('/reveal'));
  await page.getByRole('button', { name: 'Show the passphrase' }).click();
  const revealed = (await (await answered).json()) as Revealed;
  await page.getByText(/Hides itself in \d+ s/).waitFor();
  const passphrase = revealed.codes[0]?.passphrase ?? '';
  expect(passphrase.length).toBeGreaterThanOrEqual(8);
  return passphrase;
}

/** All text of the page and of what it could keep, without spaces, as a passphrase may be set in groups. */
const held = (page: Page) =>
  page.evaluate(async () => ({
    page: document.documentElement.outerHTML.replace(/<[^>]*>|\s/g, ''),
    kept: JSON.stringify([
      { ...localStorage },
      { ...sessionStorage },
      document.cookie,
      history.state,
      await indexedDB.databases(),
      await caches.keys(),
      location.href,
      (await navigator.serviceWorker.getRegistrations()).length,
    ]),
  }));

test('R29: a shown passphrase leaves the page by itself, when it is left, and is kept nowhere', async () => {
  const { page, context, trouble } = await openWindow(demo.browser, demo.running.origin, {
    viewport: { width: 1180, height: 820 },
  });
  await page.clock.install();
  await signIn(page, demo.person('Captain'));
  const place = (await placesToLook(demo.running.services)).find(({ name }) => name === 'network');
  await page.goto(place?.path ?? '');
  await settled(page);

  const passphrase = (await show(page)).replace(/\s/g, '');
  const shown = await held(page);
  expect(shown.page).toContain(passphrase);
  expect(shown.kept).not.toContain(passphrase);

  // After its 30 seconds.
  await page.clock.fastForward(31_000);
  await page.getByRole('button', { name: 'Show the passphrase' }).waitFor();
  expect((await held(page)).page).not.toContain(passphrase);

  // Left within the program and come back to.
  await show(page);
  await page.getByRole('link', { name: 'Log' }).first().click();
  await page.waitForURL(/\/log/);
  expect((await held(page)).page).not.toContain(passphrase);
  await page.goBack();
  await page.getByRole('button', { name: 'Show the passphrase' }).waitFor();
  expect((await held(page)).page).not.toContain(passphrase);

  // Left for another document and come back to.
  await show(page);
  await page.goto('about:blank');
  await page.goBack();
  await page.getByRole('button', { name: 'Show the passphrase' }).waitFor();
  const back = await held(page);
  expect(back.page).not.toContain(passphrase);
  expect(back.kept).not.toContain(passphrase);
  expect(trouble.filter(({ what }) => !what.includes('about:blank'))).toEqual([]);
  await context.close();
}, 90_000);
