/** One step of the database's shape. */
export interface Migration {
  readonly name: string;
  /** Run once, in one transaction, as the owning role. */
  readonly sql: string;
}
