import { existsSync } from 'node:fs';
import { type Browser, type BrowserContext, chromium, type Page } from 'playwright-core';

const FLAGS = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

/** Debian's Chromium, headless. */
export function launchBrowser(): Promise<Browser> {
  const executablePath = process.env.CHROMIUM ?? '/usr/bin/chromium';
  if (!existsSync(executablePath))
    throw new Error('Chromium is not installed. Run as root:  apt-get install chromium');
  return chromium.launch({ executablePath, args: FLAGS });
}

export interface Viewport {
  readonly width: number;
  readonly height: number;
}

export interface Trouble {
  readonly where: string;
  readonly what: string;
}

export interface Watched {
  readonly context: BrowserContext;
  readonly page: Page;
  /** Script errors, refused content and requests that went elsewhere, as they happen. */
  readonly trouble: Trouble[];
}

/** A browser window of its own, watched: a script error, a policy violation or a request to anywhere else is trouble. */
export async function openWindow(
  browser: Browser,
  origin: string,
  options: { viewport: Viewport; theme?: 'light' | 'dark'; touch?: boolean; scale?: number },
): Promise<Watched> {
  const context = await browser.newContext({
    baseURL: origin,
    viewport: options.viewport,
    colorScheme: options.theme ?? 'light',
    hasTouch: options.touch ?? false,
    deviceScaleFactor: options.scale ?? 1,
    reducedMotion: 'reduce',
    locale: 'en-GB',
    acceptDownloads: true,
  });
  const trouble: Trouble[] = [];
  const page = await context.newPage();
  page.on('pageerror', (error) =>
    trouble.push({ where: page.url(), what: `script error: ${error.message}` }),
  );
  page.on('console', (message) => {
    // A refused request is told by its own answer; everything else a browser calls an error is one.
    if (message.type() === 'error' && !message.text().startsWith('Failed to load resource'))
      trouble.push({ where: page.url(), what: message.text() });
  });
  page.on('request', (request) => {
    if (!request.url().startsWith(origin) && !/^(data|blob):/.test(request.url()))
      trouble.push({ where: page.url(), what: `a request to ${request.url()}` });
  });
  await context.addInitScript(() => {
    addEventListener('securitypolicyviolation', (event) =>
      console.error(`policy violation: ${event.violatedDirective} ${event.blockedURI}`),
    );
  });
  return { context, page, trouble };
}

/** Signs in through the form, as a person does. */
export async function signIn(page: Page, person: { email: string; password: string }): Promise<void> {
  await page.goto('/sign-in');
  await page.getByLabel('Mail address').fill(person.email);
  await page.getByLabel('Password').fill(person.password);
  await page.getByRole('button', { name: 'Sign in' }).click();
  await page.waitForURL((url) => !url.pathname.startsWith('/sign-in'));
}

/** Waits until nothing on the page is being fetched any more. */
export async function settled(page: Page): Promise<void> {
  await page.waitForLoadState('networkidle');
  await page.evaluate(() => document.fonts.ready);
}
