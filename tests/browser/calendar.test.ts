import { expect, test } from 'vitest';
import { openWindow, settled, signIn } from '../support/browser.ts';
import { useDemo } from './demo.ts';

const demo = useDemo();

test('the captain adds a crossing to the calendar, is told what is wrong, corrects it and takes it off', async () => {
  const { page, context, trouble } = await openWindow(demo.browser, demo.running.origin, {
    viewport: { width: 1180, height: 820 },
  });
  await signIn(page, demo.person('Captain'));
  await page.getByRole('link', { name: 'Networks' }).click();
  await settled(page);
  await page.getByRole('button', { name: 'Edit the calendar' }).click();
  await page.getByRole('button', { name: 'Add to the calendar' }).click();
  await page.getByLabel('What it is').selectOption('crossing');
  const begins = await page.getByLabel('Begins').inputValue();
  await page.getByLabel('Ends').fill(begins);
  await page.getByRole('button', { name: 'Add it' }).click();
  await page.getByText('It ends after it begins; choose a later time').waitFor();
  await page.getByLabel('Ends').fill(begins.replace('T15:00', 'T23:00'));
  await page.getByLabel('Called').fill('Night run to Vis');
  await page.getByRole('button', { name: 'Add it' }).click();
  const row = page.getByRole('button', { name: /^Night run to Vis, crossing/ });
  await row.click();
  expect(await page.getByLabel('Begins').inputValue()).toBe(begins);
  await page.getByLabel('To', { exact: true }).fill('Vis');
  await page.getByRole('button', { name: 'Save' }).click();
  await page.getByRole('button', { name: /Night run to Vis.*to Vis$/ }).click();
  await page.getByRole('button', { name: 'Take it off the calendar' }).click();
  await page.getByRole('button', { name: 'Take it off', exact: true }).click();
  await row.waitFor({ state: 'detached' });
  expect(trouble).toEqual([]);
  await context.close();
}, 60_000);
