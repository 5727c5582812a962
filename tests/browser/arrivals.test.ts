import type { Page } from 'playwright-core';
import { describe, expect, test } from 'vitest';
import { openWindow, settled, signIn } from '../support/browser.ts';
import { useDemo } from './demo.ts';

const demo = useDemo();
const TABLET = { width: 1180, height: 820 };

/** Presses Tab until what has the focus matches; fails when it is not reached within a page's worth of stops. */
async function tabTo(page: Page, name: RegExp): Promise<void> {
  for (let stop = 0; stop < 60; stop += 1) {
    await page.keyboard.press('Tab');
    const text = await page.evaluate(
      () => document.activeElement?.getAttribute('aria-label') ?? document.activeElement?.textContent ?? '',
    );
    if (name.test(text)) return;
  }
  throw new Error(`Tab never reaches ${name}`);
}

describe('the arrivals screen', () => {
  test('works by keyboard alone: choose by arrow keys, hand over, take back', async () => {
    const { page, context, trouble } = await openWindow(demo.browser, demo.running.origin, {
      viewport: TABLET,
    });
    await signIn(page, demo.person('Purser'));
    await settled(page);
    await tabTo(page, /Sigrun Brandvold/);
    for (const _guest of ['Aksel', 'Matteo', 'Livia', 'Theo']) await page.keyboard.press('ArrowDown');
    await page.keyboard.press('Enter');
    await page.getByRole('heading', { name: 'Theo Abara' }).waitFor();
    await tabTo(page, /^Hand over printed card$/);
    await page.keyboard.press('Enter');
    const theo = page.getByRole('button', { name: /Theo Abara/ });
    await theo.filter({ hasText: /Card M-\d+, / }).waitFor();
    await tabTo(page, /^Undo/);
    await page.keyboard.press('Enter');
    await theo.filter({ hasText: /Card M-\d+ ready/ }).waitFor();
    expect(trouble).toEqual([]);
    await context.close();
  }, 60_000);

  test('works by thumb: two taps from the list to a logged handover, targets of 48 px, the next guest chosen', async () => {
    const { page, context } = await openWindow(demo.browser, demo.running.origin, {
      viewport: TABLET,
      touch: true,
    });
    await signIn(page, demo.person('Purser'));
    await settled(page);
    const small = await page.evaluate(() =>
      [...document.querySelectorAll('[data-row], fieldset label, aside button[class*="min-h-14"]')]
        .map((element) => ({
          text: element.textContent ?? '',
          height: element.getBoundingClientRect().height,
        }))
        .filter(({ height }) => height < 48),
    );
    expect(small).toEqual([]);
    await page.getByRole('button', { name: /Nils Abara/ }).tap();
    await page.getByRole('button', { name: 'Hand over printed card' }).tap();
    await page.getByRole('button', { name: /Nils Abara.*Card M-\d+, / }).waitFor();
    await page.getByRole('heading', { name: 'Runa Abara' }).waitFor();
    const logged = await page.evaluate(async () => {
      const { memberships } = await (await fetch('/api/session')).json();
      const { entries } = await (
        await fetch(`/api/vessels/${memberships[0].vesselId}/log?person=Nils`)
      ).json();
      return entries.map(
        ({ words, subject }: { words: string; subject: { name: string } }) => `${words}: ${subject.name}`,
      );
    });
    expect(logged[0]).toBe('Card handed over: Nils Abara');
    await context.close();
  }, 60_000);

  test('says so when the server cannot be reached, loses nothing, and carries on by itself', async () => {
    const { page, context } = await openWindow(demo.browser, demo.running.origin, { viewport: TABLET });
    await signIn(page, demo.person('Purser'));
    await settled(page);
    await page.getByRole('button', { name: /Runa Abara/ }).click();
    await context.setOffline(true);
    await page.getByRole('button', { name: 'Hand over printed card' }).click();
    await page
      .getByText(/cannot reach its server/)
      .first()
      .waitFor();
    await page.getByRole('button', { name: /Runa Abara.*ready/ }).waitFor();
    await context.setOffline(false);
    await page.getByText('What you see may be old').waitFor({ state: 'detached', timeout: 30_000 });
    await page.getByRole('button', { name: 'Hand over printed card' }).click();
    await page.getByRole('button', { name: /Runa Abara.*Card M-\d+, / }).waitFor();
    await context.close();
  }, 90_000);
});
