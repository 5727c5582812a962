import { AsyncLocalStorage } from 'node:async_hooks';
import type { Socket } from 'node:net';
import { availableParallelism } from 'node:os';
import { type Client, Pool, type QueryConfig, type QueryResult } from 'pg';
import { Sequelize, Transaction } from 'sequelize';
import { databaseError, often, statement, values } from './statement.ts';

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

const SCOPE =
  often(`SELECT set_config('quayword.scope', $kind, true), set_config('quayword.vessel', $vessel, true),
  set_config('quayword.dealer', $dealer, true)`);

/**
 * Connections of one server: with twice the cores and one, all of them have something to do while some wait, and more
 * would only take turns (common practice; measured by `npm run bench -- api`).
 */
const POOL_MAX = Math.max(5, 2 * availableParallelism() + 1);

export interface DatabaseOptions {
  readonly poolMax?: number;
  /** The database ends a transaction that says nothing for this long and takes it back, in milliseconds; 30,000 unless set. */
  readonly idleMs?: number;
  /** Throws where a transaction is opened inside another, which with a small pool waits for itself. For tests. */
  readonly refuseNested?: boolean;
}

export interface TransactionOptions {
  /** The database itself then refuses every write: for safe methods. */
  readonly readOnly?: boolean;
}

/** A connection of the pool: the driver's client, lent to one transaction at a time. */
interface Lent extends Client {
  uuid?: string;
}

/** What Sequelize keeps on its transactions besides what it declares. */
type Held = Transaction & { readonly id: string; connection?: Lent; finished?: 'commit' | 'rollback' };

export class Database {
  readonly sequelize: Sequelize;
  private readonly inside: AsyncLocalStorage<true> | null;
  /** One connection that no request can take: whether the database is there is known also when all others are lent. */
  private readonly reserved: Pool;

  constructor(url: string, options: DatabaseOptions = {}) {
    this.inside = options.refuseNested ? new AsyncLocalStorage() : null;
    this.sequelize = new Sequelize(url, {
      dialect: 'postgres',
      logging: false,
      pool: { max: options.poolMax ?? POOL_MAX, min: 0, acquire: 3_000, idle: 10_000 },
      dialectOptions: {
        application_name: 'quayword',
        statement_timeout: 30_000,
        idle_in_transaction_session_timeout: options.idleMs ?? 30_000,
        // Rows looked for by key lie in memory or on flash: reading them one by one beats reading a table.
        options: '-c random_page_cost=1.1 -c jit=off',
      },
      define: { underscored: true, timestamps: false, freezeTableName: true },
      minifyAliases: false,
    });
    this.reserved = new Pool({
      connectionString: url,
      max: 1,
      idleTimeoutMillis: 10_000,
      connectionTimeoutMillis: 3_000,
      statement_timeout: 3_000,
      application_name: 'quayword-health',
      allowExitOnIdle: true,
    });
    // An idle connection that breaks is replaced at the next question.
    this.reserved.on('error', () => undefined);
    this.sequelize.addHook('afterConnect', (connection) => {
      // Statements go out without waiting for the answers before them.
      Object.assign(connection as object, { pipeline: true });
    });
  }

  /** Runs `work` in one transaction inside a scope. The scope's settings end with the transaction. */
  async transaction<T>(
    scope: Scope,
    work: (tx: Tx) => Promise<T>,
    options: TransactionOptions = {},
  ): Promise<T> {
    if (this.inside === null) return this.inTransaction(scope, work, options);
    if (this.inside.getStore())
      throw new Error('A transaction was opened inside another. Hand its tx on instead.');
    return this.inside.run(true, () => this.inTransaction(scope, work, options));
  }

  private async inTransaction<T>(
    scope: Scope,
    work: (tx: Tx) => Promise<T>,
    { readOnly }: TransactionOptions,
  ): Promise<T> {
    const tx = new Transaction(this.sequelize, {}) as Held;
    const connections = this.sequelize.connectionManager;
    const client = (await connections.getConnection({ type: 'write', useMaster: true })) as Lent;
    client.uuid = tx.id;
    tx.connection = client;
    let sound = false;
    try {
      // Goes out together with the first statement; that one fails too where this does.
      together(client);
      const begun = send(client, { text: readOnly ? 'BEGIN READ ONLY' : 'BEGIN' });
      begun.catch(() => undefined);
      if (scope.kind !== 'none') await this.setScope(tx, scope);
      const result = await work(tx);
      await begun;
      tx.finished = 'commit';
      const { command } = await send(client, { text: 'COMMIT' });
      sound = true;
      if (command !== 'COMMIT')
        throw new Error('A statement had failed and was passed over, so the transaction was taken back');
      return result;
    } catch (error) {
      if (!sound) sound = await rolledBack(client, tx);
      throw error;
    } finally {
      client.uuid = undefined;
      await giveBack(connections, client, sound);
    }
  }

  /** Sets or widens what the rest of a transaction may see. */
  async setScope(tx: Tx, scope: Scope): Promise<void> {
    await this.run(tx, SCOPE, {
      kind: scope.kind === 'none' ? '' : scope.kind,
      vessel: scope.kind === 'vessel' ? scope.vesselId : '',
      dealer: scope.kind === 'fleet' ? scope.dealerId : '',
    });
  }

  /** Rows of a select; `$name` in the text stands for a bound value. */
  async rows<T extends object = Row>(tx: Tx, sql: string, bind: Record<string, unknown> = {}): Promise<T[]> {
    return this.run<T>(tx, sql, bind);
  }

  async row<T extends object = Row>(
    tx: Tx,
    sql: string,
    bind: Record<string, unknown> = {},
  ): Promise<T | null> {
    return (await this.run<T>(tx, sql, bind))[0] ?? null;
  }

  /** Runs a statement; answers the rows of a RETURNING clause. */
  async run<T extends object = Row>(tx: Tx, sql: string, bind: Record<string, unknown> = {}): Promise<T[]> {
    const { connection, finished } = tx as Held;
    if (!connection || finished) throw new Error('This transaction is over; its statements belong inside');
    const known = statement(sql);
    const result = await send(connection, {
      name: known.name,
      text: known.text,
      values: values(known, bind),
    });
    return result.rows as T[];
  }

  /** Asks the database for nothing. Throws when it does not answer within seconds. */
  async ping(): Promise<void> {
    await this.reserved.query('SELECT 1');
  }

  async close(): Promise<void> {
    await this.reserved.end();
    await this.sequelize.close();
  }
}

/** What is sent from here to the end of this turn of the event loop leaves as one packet. */
function together(client: Lent): void {
  const { stream } = (client as unknown as { connection: { stream: Socket } }).connection;
  stream.cork();
  process.nextTick(() => stream.uncork());
}

async function send(client: Lent, query: QueryConfig): Promise<QueryResult> {
  try {
    return await client.query(query);
  } catch (error) {
    throw databaseError(error);
  }
}

/** Whether the connection can be lent again: false when it does not even take a rollback. */
async function rolledBack(client: Lent, tx: Held): Promise<boolean> {
  const committing = tx.finished === 'commit';
  tx.finished = 'rollback';
  // After a COMMIT whose answer was lost nobody knows what state the connection is in.
  if (committing) return false;
  try {
    await client.query('ROLLBACK');
    return true;
  } catch {
    return false;
  }
}

async function giveBack(
  connections: Sequelize['connectionManager'],
  client: Lent,
  sound: boolean,
): Promise<void> {
  const pool = connections as unknown as {
    releaseConnection(client: Lent): void;
    destroyConnection(client: Lent): Promise<void>;
  };
  if (sound) pool.releaseConnection(client);
  else await pool.destroyConnection(client).catch(() => undefined);
}
