import { execFileSync } from 'node:child_process';
import { mkdirSync, rmSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { pino } from 'pino';
import { layDemo } from '../../server/seeders/layDemo.ts';
import { launchBrowser, openWindow, settled, signIn } from '../support/browser.ts';
import { serve } from '../support/server.ts';
import { temporaryDatabase } from '../support/temporaryDatabase.ts';
import { lookAt, placesToLook, startCrewChange } from './places.ts';

/** `npm run shots`: every route, both themes, four widths, into `.shots/`, with a page to leaf through them. */
const OUT = fileURLToPath(new URL('../../.shots/', import.meta.url));
const SIZES = [
  { width: 390, height: 844 },
  { width: 820, height: 1180 },
  { width: 1180, height: 820 },
  { width: 1440, height: 900 },
];
const THEMES = ['light', 'dark'] as const;

/** The few small pictures that README shows: three screens and a cabin card as it is printed. */
async function readmePictures(people: readonly SignIn[]): Promise<void> {
  const out = path.join(OUT, 'readme');
  mkdirSync(out, { recursive: true });
  const screens = [
    { role: 'Purser', name: 'arrivals', link: 'Arrivals', proof: 'Livia Quaranta' },
    { role: 'Chief stew', name: 'networks', link: 'Networks', proof: 'Next six weeks' },
    { role: 'Dealer, service desk', name: 'fleet', link: 'Fleet', proof: 'Boat last heard' },
  ];
  for (const { role, name, link, proof } of screens) {
    const { page, context } = await openWindow(browser, running.origin, {
      viewport: { width: 1180, height: 740 },
      scale: 0.55,
    });
    await signIn(page, personOf(people, role));
    await page.getByRole('link', { name: link, exact: true }).click();
    await page.getByText(proof).first().waitFor();
    await settled(page);
    await page.screenshot({ path: path.join(out, `${name}.png`) });
    if (name === 'arrivals') {
      await page.getByRole('link', { name: 'Cards' }).click();
      await page.getByLabel('Cabin cards').check();
      const [download] = await Promise.all([
        page.waitForEvent('download'),
        page.getByRole('button', { name: /^Print \d+ cards/ }).click(),
      ]);
      const png = path.join(out, 'card');
      execFileSync('pdftoppm', ['-r', '64', '-png', '-singlefile', '-f', '1', await download.path(), png]);
    }
    await context.close();
  }
}

type SignIn = { role: string; vessel: string; email: string; password: string };

function personOf(people: readonly SignIn[], role: string): SignIn {
  const found = people.find(
    (one) => one.role === role && (one.vessel === 'Tamarisk' || role.startsWith('Dealer')),
  );
  if (!found) throw new Error(`Nobody of the demo is ${role}`);
  return found;
}

const database = await temporaryDatabase();
const running = await serve(
  { ...process.env, DATABASE_APP_URL: database.appUrl, SMTP_URL: undefined, CHECKPOINT_DIR: undefined },
  { log: pino({ level: 'silent' }) },
);
const browser = await launchBrowser();
try {
  const people: SignIn[] = [];
  await layDemo(running.services, async (given) => void people.push(...given));
  await readmePictures(people);
  await startCrewChange(browser, running.origin, personOf(people, 'Chief stew'));
  const places = await placesToLook(running.services);
  rmSync(path.join(OUT, 'routes'), { recursive: true, force: true });
  mkdirSync(path.join(OUT, 'routes'), { recursive: true });
  const names: string[] = [];
  for (const theme of THEMES) {
    for (const role of new Set(places.map((place) => place.role))) {
      const { page, context } = await openWindow(browser, running.origin, {
        viewport: { width: 1180, height: 820 },
        theme,
      });
      if (role) await signIn(page, personOf(people, role));
      for (const place of places.filter((one) => one.role === role)) {
        for (const size of SIZES) {
          await page.setViewportSize(size);
          await lookAt(page, place.path);
          const name = `${place.name}-${size.width}-${theme}.png`;
          await page.screenshot({ path: path.join(OUT, 'routes', name), fullPage: true });
          names.push(name);
        }
      }
      await context.close();
    }
    process.stdout.write(`${theme}: ${names.length} pictures so far\n`);
  }
  const figures = names.map(
    (name) =>
      `<figure><figcaption>${name}</figcaption><a href="routes/${name}"><img loading="lazy" src="routes/${name}" alt="${name}"></a></figure>`,
  );
  writeFileSync(
    path.join(OUT, 'index.html'),
    `<!doctype html><html lang="en"><meta charset="utf-8"><title>Quayword, every route</title><style>body{font:15px sans-serif;display:grid;grid-template-columns:repeat(auto-fill,minmax(320px,1fr));gap:1rem}figure{margin:0}img{width:100%;border:1px solid #999}</style>${figures.join('\n')}`,
  );
  process.stdout.write(`${names.length} pictures in .shots/, leaf through .shots/index.html\n`);
} finally {
  await browser.close();
  await running.stop();
  await database.drop();
}
