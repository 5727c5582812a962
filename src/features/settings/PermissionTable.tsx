import { Fragment } from 'react';
import {
  DEALER_PERMISSIONS,
  ROLE_NAMES,
  VESSEL_PERMISSIONS,
  VESSEL_ROLES,
  type VesselRole,
} from '../../../shared/rules/permissions.ts';
import { Table, Td, Th } from '../../components/Table.tsx';
import { cx } from '../../lib/cx.ts';
import { permissionGroups } from './permissionGroups.ts';

const capital = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);

/** Who may do what, made from the very table the server goes by. The person's own roles are marked. */
export function PermissionTable({ own }: { own: readonly VesselRole[] }) {
  const isOwn = (role: VesselRole) => own.includes(role);
  return (
    <>
      <p className="text-sm text-soft">
        Roles add up: somebody with several may do what any of them may.
        {own.length > 0 ? ' Your own are marked.' : null}
      </p>
      <Table
        caption="Who may do what, by role"
        className="relative"
        head={
          <>
            <Th className="sticky left-0 bg-paper">Who may …</Th>
            {VESSEL_ROLES.map((role) => (
              <th
                key={role}
                scope="col"
                className={cx(
                  'min-w-20 px-2 py-2 text-center align-bottom text-sm font-normal',
                  isOwn(role) ? 'bg-land text-ink' : 'text-soft',
                )}
              >
                {ROLE_NAMES[role]}
                {isOwn(role) ? <span className="sr-only">, your role</span> : null}
              </th>
            ))}
          </>
        }
      >
        {permissionGroups().map(({ title, actions }) => (
          <Fragment key={title}>
            <tr>
              <th
                scope="colgroup"
                colSpan={VESSEL_ROLES.length + 1}
                className="pt-5 pb-1.5 text-left text-base font-semibold"
              >
                <span className="sticky left-0">{title}</span>
              </th>
            </tr>
            {actions.map((action) => {
              const { may, roles } = VESSEL_PERMISSIONS[action];
              const allowed: readonly VesselRole[] = roles;
              return (
                <tr key={action}>
                  <th
                    scope="row"
                    className="sticky left-0 w-64 min-w-36 bg-paper py-2 pr-3 text-left align-top font-normal"
                  >
                    {capital(may)}
                  </th>
                  {VESSEL_ROLES.map((role) => (
                    <Td
                      key={role}
                      className={cx('px-2 py-2 text-center last:pr-2', isOwn(role) && 'bg-land')}
                    >
                      {allowed.includes(role) ? (
                        <span className="font-medium text-shore-ink">yes</span>
                      ) : (
                        <span className="text-sm text-soft">no</span>
                      )}
                    </Td>
                  ))}
                </tr>
              );
            })}
          </Fragment>
        ))}
      </Table>
      <p className="max-w-2xl">
        The dealer's service desk may {listed(Object.values(DEALER_PERMISSIONS).map(({ may }) => may))}. It
        sees no passphrase, no guest's name, and not this page.
      </p>
    </>
  );
}

const listed = (items: readonly string[]) =>
  items.length < 2 ? items.join('') : `${items.slice(0, -1).join(', ')}, and ${items.at(-1)}`;
