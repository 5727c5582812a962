import { QueryTypes, Sequelize, type Transaction } from 'sequelize';

export type Tx = Transaction;
export type Row = Record<string, unknown>;

/**
 * What a transaction may see (row-level security, migration 0004):
 * one vessel; one dealer's fleet, read only and without secrets or names; everything, for jobs;
 * or nothing that belongs to a vessel.
 */
export type Scope =
  | { readonly kind: 'vessel'; readonly vesselId: string }
  | { readonly kind: 'fleet'; readonly dealerId: string }
  | { readonly kind: 'system' }
  | { readonly kind: 'none' };

export class Database {
  readonly sequelize: Sequelize;

  constructor(url: string, options: { poolMax?: number } = {}) {
    this.sequelize = new Sequelize(url, {
      dialect: 'postgres',
      logging: false,
      pool: { max: options.poolMax ?? 10, min: 0, acquire: 3_000, idle: 10_000 },
      dialectOptions: {
        application_name: 'quayword',
        statement_timeout: 30_000,
        idle_in_transaction_session_timeout: 30_000,
      },
      define: { underscored: true, timestamps: false, freezeTableName: true },
      minifyAliases: false,
    });
  }

  /** Runs `work` in one transaction inside a scope. The scope's settings end with the transaction. */
  async transaction<T>(scope: Scope, work: (tx: Tx) => Promise<T>): Promise<T> {
    return this.sequelize.transaction(async (tx) => {
      await setScope(this.sequelize, tx, scope);
      return work(tx);
    });
  }

  /** Rows of a select, with named `:replacements` sent as bound parameters `$name`. */
  async rows<T extends object = Row>(tx: Tx, sql: string, bind: Record<string, unknown> = {}): Promise<T[]> {
    return this.sequelize.query<T>(sql, { type: QueryTypes.SELECT, bind, transaction: tx });
  }

  async row<T extends object = Row>(
    tx: Tx,
    sql: string,
    bind: Record<string, unknown> = {},
  ): Promise<T | null> {
    return (await this.rows<T>(tx, sql, bind))[0] ?? null;
  }

  /** Runs a statement; answers the rows of a RETURNING clause. */
  async run<T extends object = Row>(tx: Tx, sql: string, bind: Record<string, unknown> = {}): Promise<T[]> {
    const [rows] = await this.sequelize.query(sql, { bind, transaction: tx });
    return rows as T[];
  }

  async close(): Promise<void> {
    await this.sequelize.close();
  }
}

export async function setScope(sequelize: Sequelize, tx: Tx, scope: Scope): Promise<void> {
  if (scope.kind === 'none') return;
  await sequelize.query(
    `SELECT set_config('quayword.scope', $kind, true), set_config('quayword.vessel', $vessel, true),
            set_config('quayword.dealer', $dealer, true)`,
    {
      bind: {
        kind: scope.kind,
        vessel: scope.kind === 'vessel' ? scope.vesselId : '',
        dealer: scope.kind === 'fleet' ? scope.dealerId : '',
      },
      transaction: tx,
      type: QueryTypes.SELECT,
    },
  );
}
