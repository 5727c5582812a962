/** Every code an error can carry, with its HTTP status (RFC 9110) and the title people see. */
export const ERROR_CODES = {
  invalid: [422, 'Some of this needs correcting'],
  malformed: [400, 'That could not be read'],
  not_signed_in: [401, 'Please sign in'],
  wrong_sign_in: [401, 'That did not match'],
  code_needed: [401, 'A code is needed'],
  forbidden: [403, 'Your role does not allow this'],
  step_up: [403, 'Please confirm it is you'],
  second_factor_needed: [403, 'A second factor is needed first'],
  bad_origin: [403, 'That request did not come from Quayword'],
  not_found: [404, 'Not found'],
  method: [405, 'That cannot be done here'],
  conflict: [409, 'Something changed meanwhile'],
  gone: [410, 'No longer there'],
  too_large: [413, 'That is too large'],
  wrong_type: [415, 'That kind of content is not taken here'],
  key_reused: [422, 'That request was already used for something else'],
  too_weak: [422, 'That passphrase is too weak'],
  reused: [422, 'That passphrase was used before'],
  not_now: [409, 'Not now'],
  too_many: [429, 'Too many tries'],
  unavailable: [503, 'Not available just now'],
  internal: [500, 'Something went wrong'],
} as const satisfies Record<string, readonly [number, string]>;

export type ErrorCode = keyof typeof ERROR_CODES;

export interface AppErrorOptions {
  /** Invalid fields keyed by path, each with what would be right. */
  readonly errors?: Record<string, string[]>;
  /** Seconds after which a retry makes sense. */
  readonly retryAfter?: number;
  readonly cause?: unknown;
}

/** The one error people meet: a stable code and a sentence a purser understands. */
export class AppError extends Error {
  readonly errors: Record<string, string[]> | undefined;
  readonly retryAfter: number | undefined;

  constructor(
    readonly code: ErrorCode,
    readonly sentence: string,
    options: AppErrorOptions = {},
  ) {
    super(sentence, { cause: options.cause });
    this.errors = options.errors;
    this.retryAfter = options.retryAfter;
  }

  get status(): number {
    return ERROR_CODES[this.code][0];
  }

  get title(): string {
    return ERROR_CODES[this.code][1];
  }
}

/** The answer for somebody else's thing and for nothing at all: the same to the octet. */
export const notFound = () => new AppError('not_found', 'There is nothing here, or it is not yours to see.');
export const forbidden = () =>
  new AppError('forbidden', 'Your role on this vessel does not allow this. Ask the captain.');
export const invalid = (errors: Record<string, string[]>) =>
  new AppError('invalid', Object.values(errors).flat()[0] ?? 'Some fields need correcting.', { errors });
