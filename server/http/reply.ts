import type { Contract } from '../../shared/api/contract.ts';

// biome-ignore lint/suspicious/noExplicitAny: the widest contract, used only as a constraint
export type AnyContract = Contract<any, any, any, any>;

/** A file answered instead of JSON. */
export interface FileReply {
  readonly contentType: 'application/pdf' | 'text/csv; charset=utf-8';
  /** Without path or control characters; from our own words, never from input. */
  readonly filename: string;
  readonly body: Buffer | string;
}

/** An answer as it will be sent. */
export interface Presented {
  readonly status: number;
  readonly json?: unknown;
  readonly file?: FileReply;
}
