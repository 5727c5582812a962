declare module 'autocannon' {
  interface Load {
    readonly url: string;
    readonly connections: number;
    /** Seconds. */
    readonly duration: number;
    readonly headers?: Record<string, string>;
  }
  interface Outcome {
    readonly requests: { readonly average: number; readonly total: number };
    /** Milliseconds. */
    readonly latency: { readonly p99: number };
    readonly errors: number;
    readonly timeouts: number;
    readonly non2xx: number;
  }
  export default function autocannon(load: Load): Promise<Outcome>;
}
