/** Types of the part of `setUp.mjs` that TypeScript uses. */
export class SetUpError extends Error {}
export function checkNode(version?: string): void;
