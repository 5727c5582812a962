/** Types of `database.mjs`, which must run before any package is installed. */
export function databaseUp(options: {
  dir: string;
  name: string;
  log: (sentence: string) => void;
  fast?: boolean;
  firstPort?: number;
}): Promise<{
  ownerUrl: string;
  appUrl: string;
  /** Where the server's files are: below `dir` unless its user may not walk there. */
  dataDir: string;
  /** Ends the server if this call started it. */
  stop: () => Promise<void>;
  /** `stop`, and the data goes too. */
  discard: () => Promise<void>;
}>;
