import { mkdirSync, rmSync, writeFileSync } from 'node:fs';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { pino } from 'pino';
import { layDemo } from '../../server/seeders/layDemo.ts';
import { launchBrowser, openWindow, signIn } from '../support/browser.ts';
import { serve } from '../support/server.ts';
import { temporaryDatabase } from '../support/temporaryDatabase.ts';
import { lookAt, placesToLook } from './places.ts';

/** `npm run shots`: every route, both themes, four widths, into `.shots/`, with a page to leaf through them. */
const OUT = fileURLToPath(new URL('../../.shots/', import.meta.url));
const SIZES = [
  { width: 390, height: 844 },
  { width: 820, height: 1180 },
  { width: 1180, height: 820 },
  { width: 1440, height: 900 },
];
const THEMES = ['light', 'dark'] as const;

const database = await temporaryDatabase();
const running = await serve(
  { ...process.env, DATABASE_APP_URL: database.appUrl, SMTP_URL: undefined },
  { log: pino({ level: 'silent' }) },
);
const browser = await launchBrowser();
try {
  const people: { role: string; vessel: string; email: string; password: string }[] = [];
  await layDemo(running.services, async (given) => void people.push(...given));
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
      const person = people.find(
        (one) => one.role === role && (one.vessel === 'Tamarisk' || role?.startsWith('Dealer')),
      );
      if (person) await signIn(page, person);
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
