import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { Page } from 'playwright-core';
import { beforeAll, describe, expect, test } from 'vitest';
import { routes } from '../../src/app/routes.tsx';
import { openWindow, signIn } from '../support/browser.ts';
import { useDemo } from './demo.ts';
import { lookAt, type PlaceToLook, placesToLook, scrollsSideways, startCrewChange } from './places.ts';

const demo = useDemo();
const AXE = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

let places: PlaceToLook[] = [];
beforeAll(async () => {
  await startCrewChange(demo.browser, demo.running.origin, demo.person('Chief stew'));
  places = await placesToLook(demo.running.services);
});

interface Finding {
  rule: string;
  impact: string | null;
  where: string[];
}

/** WCAG 2.2 AA and below, as axe-core reads it. */
async function axe(page: Page): Promise<Finding[]> {
  // Through the debugger, because the page's own policy lets no script in but its own.
  await page.evaluate(AXE);
  return page.evaluate(async () => {
    const { axe: reader } = window as unknown as {
      axe: {
        run(
          context: Document,
          options: object,
        ): Promise<{ violations: { id: string; impact: string | null; nodes: { html: string }[] }[] }>;
      };
    };
    const { violations } = await reader.run(document, {
      runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice'],
    });
    return violations.map(({ id, impact, nodes }) => ({
      rule: id,
      impact,
      where: nodes.slice(0, 3).map(({ html }) => html.slice(0, 160)),
    }));
  });
}

/** Visits every place as the person it belongs to, one window a person. */
async function everywhere(
  options: Parameters<typeof openWindow>[2],
  look: (page: Page, place: PlaceToLook) => Promise<void>,
): Promise<void> {
  for (const role of new Set(places.map((place) => place.role))) {
    const { page, context, trouble } = await openWindow(demo.browser, demo.running.origin, options);
    if (role) await signIn(page, demo.person(role));
    for (const place of places.filter((one) => one.role === role)) {
      await lookAt(page, place.path);
      await look(page, place);
    }
    expect(trouble, `as ${role ?? 'nobody'}`).toEqual([]);
    await context.close();
  }
}

describe('every route', () => {
  test.each(['light', 'dark'] as const)(
    'has nothing for axe to find, %s theme',
    async (theme) => {
      const found: (Finding & { place: string })[] = [];
      await everywhere({ viewport: { width: 1180, height: 820 }, theme }, async (page, place) => {
        for (const finding of await axe(page)) found.push({ place: place.name, ...finding });
      });
      expect(found).toEqual([]);
    },
    120_000,
  );

  test('R33: at 320 px scrolls sideways nowhere, also with hostile names, and runs nothing of theirs', async () => {
    const { services } = demo.running;
    await services.db.transaction({ kind: 'system' }, async (tx) => {
      const hostile = `<img src=x onerror="document.title='owned'">\u202Etxet`;
      await services.db.run(tx, `UPDATE guests SET name = $hostile WHERE name = 'Livia Quaranta'`, {
        hostile,
      });
      await services.db.run(tx, `UPDATE crew_members SET name = $hostile WHERE name = 'Bram Oyelaran'`, {
        hostile,
      });
    });
    const wrong: string[] = [];
    await everywhere({ viewport: { width: 320, height: 640 } }, async (page, place) => {
      if (await scrollsSideways(page)) wrong.push(`${place.name} scrolls sideways`);
      if ((await page.title()).includes('owned')) wrong.push(`${place.name} ran a script`);
      if ((await page.locator('img[src="x"]').count()) > 0) wrong.push(`${place.name} drew an image`);
    });
    expect(wrong).toEqual([]);
  }, 120_000);

  test('is looked at here: none is forgotten', () => {
    const paths: string[] = [];
    const walk = (nodes: typeof routes, above: string) => {
      for (const node of nodes) {
        const here = node.path ? `${above}/${node.path}` : above;
        if (node.lazy && (node.index || (node.path && !node.children))) paths.push(here || '/');
        if (node.children) walk(node.children, here);
      }
    };
    walk(routes, '');
    const pattern = (path: string) => new RegExp(`^${path.replace(/:\w+/g, '[^/#]+')}(#.*)?$`);
    const missing = paths.filter((path) => !places.some((place) => pattern(path).test(place.path)));
    expect(missing).toEqual([]);
  });
});
