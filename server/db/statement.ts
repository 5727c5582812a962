import { DatabaseError, ForeignKeyConstraintError, UniqueConstraintError } from 'sequelize';

/** A statement with numbered places, and the names whose values go there. */
export interface Statement {
  /** Under which a connection keeps its plan; undefined where it is planned each time. */
  readonly name: string | undefined;
  readonly text: string;
  readonly names: readonly string[];
}

/** Statements are written in the code, so there are only so many; beyond this they are read anew each time. */
const KNOWN_MAX = 2000;
const known = new Map<string, Statement>();

const frequent = new Map<string, string>();

/**
 * Marks a statement that nearly every request asks: a connection plans it once and keeps the plan (PostgreSQL manual,
 * PREPARE). Name the columns of such a statement one by one, and keep it from statements whose best plan depends on
 * how many rows a vessel has.
 */
export function often(sql: string): string {
  if (!frequent.has(sql)) frequent.set(sql, `often_${frequent.size + 1}`);
  return sql;
}

/** Reads `$name` as a bound parameter, the same name as the same one; `$$` stands for a dollar sign. */
export function statement(sql: string): Statement {
  const before = known.get(sql);
  if (before) return before;
  const names: string[] = [];
  const text = sql.replace(/\B\$(\$|\w+)/g, (_all, name: string) => {
    if (name === '$') return '$';
    const at = names.indexOf(name);
    return `$${at >= 0 ? at + 1 : names.push(name)}`;
  });
  const made = { name: frequent.get(sql), text, names };
  if (known.size < KNOWN_MAX) known.set(sql, made);
  return made;
}

/** The values of a statement's places. Throws when one is not given; only null means null. */
export function values({ names }: Statement, bind: Record<string, unknown>): unknown[] {
  return names.map((name) => {
    const value = bind[name];
    if (value === undefined) throw new Error(`The statement's $${name} was given no value`);
    return value;
  });
}

/** The driver's error as Sequelize would throw it, without the statement and its values, which nobody may log. */
export function databaseError(error: unknown): Error {
  if (!(error instanceof Error)) return new Error('The database driver failed');
  const parent = Object.assign(error, { sql: '', parameters: {} });
  const code = 'code' in error ? error.code : null;
  if (code === '23505') return new UniqueConstraintError({ parent, message: error.message, errors: [] });
  if (code === '23503') return new ForeignKeyConstraintError({ parent, message: error.message });
  return new DatabaseError(parent);
}
