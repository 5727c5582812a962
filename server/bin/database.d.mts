/** Types of `database.mjs`, which must run before any package is installed. */
export function databaseUp(options: {
  dir: string;
  name: string;
  log: (sentence: string) => void;
  fast?: boolean;
  firstPort?: number;
}): Promise<{ ownerUrl: string; appUrl: string; stop: () => Promise<void> }>;
