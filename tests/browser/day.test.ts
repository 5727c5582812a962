import { spawnSync } from 'node:child_process';
import { mkdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Page } from 'playwright-core';
import { describe, expect, test } from 'vitest';
import { derivePsk } from '../../server/passphrases/psk.ts';
import { openPassphrase } from '../../server/passphrases/sealPassphrase.ts';
import { openWindow, settled, signIn, type Watched } from '../support/browser.ts';
import { decodePdf } from '../support/decode.ts';
import { readAsNewAndroid } from '../support/wifiParser.ts';
import { useDemo } from './demo.ts';

const SHOTS = fileURLToPath(new URL('../../.shots/day', import.meta.url));
mkdirSync(SHOTS, { recursive: true });

const demo = useDemo();

/** A list as it came from a charter agent: German headings, semicolons, day-first dates, two lines that cannot be right. */
const LIST = [
  'Gästeliste;;;;;',
  'Name;Kabine;Sprache;Unter 16;Von;Bis;Reisepass',
  'Ottavia Bellandi;Owner’s suite;Italienisch;nein;;;X1234567',
  'Renzo Bellandi;Owner’s suite;Italienisch;nein;;;X1234568',
  'Fiamma Bellandi;Port VIP;Italienisch;ja;;;X1234569',
  'Harriet Lowe-Dunbar;Starboard VIP;Englisch;nein;;;X1234570',
  'Josephine Lowe-Dunbar;Starboard VIP;Englisch;nein;31.02.2027;;X1234571',
  'Callum Lowe-Dunbar;Twin forward;Englisch;ja;;;X1234572',
  'Peregrine Lowe-Dunbar;Twin forward;Englisch;vielleicht;;;X1234573',
  'Wilhelmina Osei;Twin aft;Englisch;nein;;;X1234574',
  'Kwabena Osei;Twin aft;Englisch;nein;;;X1234575',
  'Ama Osei;Port VIP;Englisch;nein;;;X1234576',
].join('\r\n');

async function shot(page: Page, name: string): Promise<void> {
  await page.screenshot({ path: path.join(SHOTS, `${name}.png`) });
}

/** The passphrase in force of a network, as the database has it. */
async function inForce(ssid: string): Promise<string> {
  const { services } = demo.running;
  return services.db.transaction({ kind: 'system' }, async (tx) => {
    const row = await services.db.row<{ id: string }>(
      tx,
      `SELECT x.id FROM passphrases x JOIN networks n ON n.id = x.network_id
       WHERE n.ssid = $ssid AND x.live_at IS NOT NULL AND x.retired_at IS NULL`,
      { ssid },
    );
    return openPassphrase(services, tx, row?.id ?? '');
  });
}

describe('a day aboard Tamarisk', () => {
  test('the purser adds a party from its list, prints cards, hands over five and adds a visitor', async () => {
    const { page, trouble, context } = await start('Purser', { width: 1180, height: 820 }, true);
    await settled(page);
    await shot(page, '01-arrivals');

    await page.getByRole('button', { name: 'Other parties' }).click();
    await page.getByRole('link', { name: 'A new party from a list' }).click();
    await page.getByLabel('Choose the file').setInputFiles({
      name: 'bellandi.csv',
      mimeType: 'text/csv',
      buffer: Buffer.from(LIST, 'latin1'),
    });
    await page.getByText('8 guests can be added, 2 lines cannot. Nothing is stored yet.').waitFor();
    expect(await page.content()).not.toContain('X12345');
    await page.getByLabel('Party').first().fill('Bellandi party');
    await shot(page, '02-list-read');
    await page.getByRole('button', { name: 'Add 8 guests' }).click();
    await page.getByRole('heading', { name: 'Bellandi party' }).waitFor();

    await page.getByRole('button', { name: 'More' }).click();
    await page.getByRole('button', { name: 'Print cards for everybody' }).click();
    const [download] = await Promise.all([
      page.waitForEvent('download'),
      page.getByRole('button', { name: 'Print 8 cards' }).click(),
    ]);
    const pdf = readFileSync(await download.path());
    const payloads = await decodePdf(pdf);
    expect(payloads).toHaveLength(8);
    const right = { ssid: 'Tamarisk Guests', password: await inForce('Tamarisk Guests') };
    for (const payload of payloads) expect(readAsNewAndroid(payload)).toMatchObject(right);
    // What a phone derives from the card (wpa_supplicant's own tool) is what we derive.
    const { stdout } = spawnSync('wpa_passphrase', [right.ssid], { input: right.password, encoding: 'utf8' });
    expect(/^\s*psk=([0-9a-f]{64})$/m.exec(stdout)?.[1]).toBe(await derivePsk(right.password, right.ssid));

    // Two taps a guest: the first is chosen already, the next by itself after each handover.
    for (const name of [
      'Ottavia Bellandi',
      'Renzo Bellandi',
      'Fiamma Bellandi',
      'Harriet Lowe-Dunbar',
      'Callum Lowe-Dunbar',
    ]) {
      await page.getByRole('button', { name: new RegExp(name) }).tap();
      const handedOver = page.waitForResponse(
        (response) => response.url().endsWith('/handovers') && response.status() === 201,
      );
      await page.getByRole('button', { name: 'Hand over printed card' }).tap();
      await handedOver;
      await page.getByRole('button', { name: new RegExp(`${name}.*Card M-`) }).waitFor();
    }
    await shot(page, '03-handed-over');

    await page.getByRole('button', { name: 'Someone not on the list' }).tap();
    await page.getByLabel('Name').fill('Photographer, Adriatic Review');
    await page.getByRole('button', { name: 'Add', exact: true }).click();
    await page.getByRole('button', { name: /Photographer/ }).waitFor();
    await page.getByRole('button', { name: 'Show large code' }).tap();
    await page.getByText('Hides itself in').waitFor();
    await shot(page, '04-large-code');
    await page.getByRole('button', { name: 'Done' }).tap();
    await page.getByRole('button', { name: /Photographer.*Shown on screen/ }).waitFor();
    expect(trouble).toEqual([]);
    await context.close();
  }, 90_000);

  test('the chief stew changes the crew network, the ETO enters it with a typing error first, the dealer sees the age', async () => {
    const dealer = await start('Dealer, service desk', { width: 1440, height: 900 });
    const tamarisk = dealer.page.getByRole('row', { name: /^Tamarisk/ });
    await dealer.page.getByLabel('Search vessels').fill('Tamarisk');
    await tamarisk.getByRole('cell', { name: '41', exact: true }).waitFor();
    await shot(dealer.page, '05-fleet-before');

    const stew = await start('Chief stew', { width: 1360, height: 900 });
    await stew.page.getByRole('link', { name: 'Networks' }).click();
    await stew.page.getByText('Tamarisk Crew is exposed').waitFor();
    await shot(stew.page, '06-networks');
    await stew.page
      .getByRole('button', { name: /Change Tamarisk Crew now|Change now/ })
      .last()
      .click();
    await stew.page.getByRole('button', { name: 'Change it now' }).click();
    await stew.page.getByRole('button', { name: 'Close' }).last().click();
    const before = await inForce('Tamarisk Crew');

    const eto = await start('ETO', { width: 390, height: 844 });
    await eto.page.getByRole('link', { name: 'Networks' }).click();
    await eto.page
      .getByRole('link', { name: /entry sheet/i })
      .first()
      .click();
    await eto.page.getByRole('button', { name: /^Open the sheet/ }).click();
    await eto.page.getByText('Hides itself in').waitFor();
    await shot(eto.page, '07-entry-sheet');
    const passphrase =
      (
        await eto.page.locator('section[aria-label="The passphrase"] [translate="no"]').first().textContent()
      )?.replace(/\s/g, '') ?? '';
    expect(passphrase).toMatch(/^[a-z]+(-[a-z]+){4,}$/);
    expect(passphrase).not.toBe(before);
    const box = eto.page.getByLabel(/^Type it back/);
    await box.fill(`${passphrase.slice(0, -1)}`);
    await eto.page.getByRole('button', { name: 'Confirm', exact: true }).click();
    await eto.page.getByText('1 character shorter').waitFor();
    await shot(eto.page, '08-typing-error');
    expect(await inForce('Tamarisk Crew')).toBe(before);
    for (let confirmed = 0; confirmed < 5; confirmed += 1) {
      await box.fill(passphrase);
      const answered = eto.page.waitForResponse((response) => response.url().endsWith('/confirm'));
      await eto.page.getByRole('button', { name: 'Confirm', exact: true }).click();
      expect((await answered).status()).toBe(200);
      await box.waitFor({ state: confirmed < 4 ? 'visible' : 'detached' });
      if (confirmed < 4) await expect.poll(() => box.inputValue()).toBe('');
    }
    await eto.page.getByText('has its new passphrase').waitFor();
    await shot(eto.page, '09-in-force');
    expect(await inForce('Tamarisk Crew')).toBe(passphrase);

    await dealer.page.reload();
    await tamarisk.getByRole('cell', { name: '0', exact: true }).nth(1).waitFor();
    await shot(dealer.page, '10-fleet-after');
    expect(await dealer.page.content()).not.toContain(passphrase);
    for (const window of [dealer, stew, eto]) {
      expect(window.trouble).toEqual([]);
      await window.context.close();
    }
    expect(demo.logged()).not.toContain(passphrase);
  }, 120_000);
});

async function start(
  role: string,
  viewport: { width: number; height: number },
  touch = false,
): Promise<Watched> {
  const window = await openWindow(demo.browser, demo.running.origin, { viewport, touch });
  await signIn(window.page, demo.person(role));
  return window;
}
