import tailwindcss from '@tailwindcss/vite';
import react from '@vitejs/plugin-react';
import { defineConfig } from 'vitest/config';

/** Client build and the test runner's settings. */
export default defineConfig({
  plugins: [react(), tailwindcss()],
  build: { outDir: 'dist/client', emptyOutDir: true, manifest: true, assetsInlineLimit: 0 },
  server: { proxy: { '/api': `http://127.0.0.1:${process.env.API_PORT ?? 4189}` } },
  test: {
    include: ['tests/**/*.test.ts', 'tests/**/*.test.tsx'],
    globalSetup: ['tests/support/globalSetup.ts'],
    setupFiles: ['tests/support/setup.ts'],
    pool: 'forks',
    testTimeout: 20_000,
    hookTimeout: 60_000,
  },
});
