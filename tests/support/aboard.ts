import type { VesselRole } from '../../shared/rules/permissions.ts';
import type { TestApp } from './app.ts';
import { Client } from './client.ts';
import { factories } from './factories.ts';

/** Short ways to sign people in and to look at what is stored. */
export function aboard(test: TestApp) {
  const make = factories(test);
  const look = <T extends object = Record<string, unknown>>(
    sql: string,
    bind: Record<string, unknown> = {},
  ): Promise<T[]> =>
    test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.rows<T>(tx, sql, bind));
  return {
    make,
    /** Rows as they are stored. */
    look,
    /** Somebody new with this role on the vessel, signed in just now. */
    async as(vesselId: string, role: VesselRole): Promise<Client> {
      return new Client(test, await make.session((await make.member(vesselId, role)).id));
    },
    /** As {@link as}, with the person. */
    async person(vesselId: string, role: VesselRole, name?: string) {
      const person = await make.member(vesselId, role, name === undefined ? {} : { name });
      return { ...person, client: new Client(test, await make.session(person.id)) };
    },
    write: (sql: string, bind: Record<string, unknown> = {}): Promise<object[]> =>
      test.services.db.transaction({ kind: 'system' }, (tx) => test.services.db.run(tx, sql, bind)),
    /** Kinds of a vessel's log, oldest first. */
    async logged(vesselId: string): Promise<string[]> {
      const rows = await look<{ kind: string }>(
        'SELECT kind FROM log_entries WHERE vessel_id = $vessel ORDER BY seq',
        { vessel: vesselId },
      );
      return rows.map(({ kind }) => kind);
    },
    /** The instant so many days ago. */
    ago: (days: number) => new Date(test.clock.now().getTime() - days * 86_400_000),
  };
}
