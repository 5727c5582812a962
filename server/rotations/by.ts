/** When something is done, and by whom. */
export interface By {
  readonly now: Date;
  /** Null for the clock and for the boat's own reports. */
  readonly actor: { readonly id: string; readonly name: string } | null;
}
