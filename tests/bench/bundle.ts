import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import { gzipSync } from 'node:zlib';
import { build } from 'vite';

interface Chunk {
  file: string;
  imports?: string[];
}

/** What a person's first page loads, by the manifest's names of its sources. */
const FIRST_PAGES = {
  signIn: ['index.html', 'src/pages/SignInPage.tsx'],
  arrivals: ['index.html', 'src/app/VesselShell.tsx', 'src/pages/ArrivalsPage.tsx'],
  fleet: ['index.html', 'src/app/DealerShell.tsx', 'src/pages/FleetPage.tsx'],
};

/** Every file these sources need before the page works: themselves and what they import statically. */
function closure(manifest: Record<string, Chunk>, sources: readonly string[]): Set<string> {
  const files = new Set<string>();
  const walk = (source: string) => {
    const chunk = manifest[source];
    if (!chunk) throw new Error(`The build has no ${source}`);
    if (files.has(chunk.file)) return;
    files.add(chunk.file);
    for (const next of chunk.imports ?? []) walk(next);
  };
  for (const source of sources) walk(source);
  return files;
}

/** JavaScript of a first load, gzip, in kB of 1,000 octets: the largest of the first pages people land on. */
export async function bench(): Promise<Record<string, number>> {
  const outDir = mkdtempSync(path.join(os.tmpdir(), 'quayword-bundle-'));
  try {
    await build({ build: { outDir, emptyOutDir: true, manifest: true }, logLevel: 'error' });
    const manifest = JSON.parse(readFileSync(path.join(outDir, '.vite', 'manifest.json'), 'utf8')) as Record<
      string,
      Chunk
    >;
    const kB = (sources: readonly string[]) => {
      const octets = [...closure(manifest, sources)]
        .filter((file) => file.endsWith('.js'))
        .reduce((sum, file) => sum + gzipSync(readFileSync(path.join(outDir, file)), { level: 9 }).length, 0);
      return Math.round(octets / 100) / 10;
    };
    const pages = Object.entries(FIRST_PAGES).map(([name, sources]): [string, number] => [
      `${name}GzKb`,
      kB(sources),
    ]);
    return { firstLoadGzKb: Math.max(...pages.map(([, size]) => size)), ...Object.fromEntries(pages) };
  } finally {
    rmSync(outDir, { recursive: true, force: true });
  }
}
