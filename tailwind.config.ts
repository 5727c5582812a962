import type { Config } from 'tailwindcss';

/** Tokens live as CSS variables in src/app/theme.css; this file only says where classes are used. */
export default { content: ['./index.html', './src/**/*.{ts,tsx}'] } satisfies Config;
