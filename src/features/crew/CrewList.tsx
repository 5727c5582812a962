import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { CrewView } from '../../../shared/api/crew.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Dialog } from '../../components/Dialog.tsx';
import { ErrorLine } from '../../components/ErrorLine.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { Section } from '../../components/Page.tsx';
import { Empty } from '../../components/PageState.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { RowName, Table, Td, Th } from '../../components/Table.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { CrewDialog } from './CrewDialog.tsx';
import { signBackOn, signOff } from './queries.ts';

interface CrewListProps {
  vesselId: string;
  zone: string;
  aboard: readonly CrewView[];
  signedOff: readonly CrewView[];
  /** Only the chief stew and the captain sign on and off. */
  mayManage: boolean;
}

type Open = { kind: 'edit'; member: CrewView | null } | { kind: 'off'; member: CrewView } | null;

/** Who is aboard, and who has signed off and still knows a passphrase in force. */
export function CrewList({ vesselId, zone, aboard, signedOff, mayManage }: CrewListProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const [open, setOpen] = useState<Open>(null);
  const back = useMutation({
    mutationFn: (member: CrewView) => signBackOn(vesselId, member.id),
    onSuccess: async (member) => {
      await client.invalidateQueries({ queryKey: ['vessels', vesselId] });
      say(<SafeText>{`${member.name} is signed on again.`}</SafeText>);
    },
    onError: (error) => say(sentenceFor(error)),
  });
  const head = (last: string) => (
    <>
      <Th>Name</Th>
      <Th>Position</Th>
      <Th>Department</Th>
      <Th>Knows the passphrase of</Th>
      <Th>{last}</Th>
      <Th>
        <span className="sr-only">What can be done</span>
      </Th>
    </>
  );
  return (
    <>
      <Section
        title="Aboard"
        action={
          mayManage ? (
            <Button
              onClick={() => setOpen({ kind: 'edit', member: null })}
              kind={aboard.length === 0 ? 'primary' : 'secondary'}
            >
              Sign somebody on
            </Button>
          ) : null
        }
      >
        {aboard.length === 0 ? (
          <Empty title="Nobody is on the crew list yet.">
            Sign on whoever knows or needs the crew network.
          </Empty>
        ) : (
          <Table caption="Crew aboard" head={head('Signed on')}>
            {aboard.map((member) => (
              <tr key={member.id}>
                <RowName>
                  <SafeText>{member.name}</SafeText>
                </RowName>
                <Td>
                  <SafeText>{member.position}</SafeText>
                </Td>
                <Td>
                  <SafeText>{member.department}</SafeText>
                </Td>
                <Td>
                  {member.holds.length > 0 ? (
                    <SafeText>{member.holds.join(', ')}</SafeText>
                  ) : (
                    <span className="text-soft">None yet</span>
                  )}
                </Td>
                <Td className="whitespace-nowrap">
                  <DateTime at={member.signedOnAt} zone={zone} as="date" />
                </Td>
                <Td className="py-0 text-right whitespace-nowrap">
                  {mayManage ? (
                    <>
                      <Button kind="quiet" onClick={() => setOpen({ kind: 'edit', member })}>
                        Correct
                      </Button>
                      <Button kind="quiet" onClick={() => setOpen({ kind: 'off', member })}>
                        Sign off
                      </Button>
                    </>
                  ) : null}
                </Td>
              </tr>
            ))}
          </Table>
        )}
      </Section>
      {signedOff.length > 0 ? (
        <Section title="Signed off">
          <Table caption="Crew signed off" head={head('Signed off')}>
            {signedOff.map((member) => (
              <tr key={member.id}>
                <RowName>
                  <SafeText>{member.name}</SafeText>
                </RowName>
                <Td>
                  <SafeText>{member.position}</SafeText>
                </Td>
                <Td>
                  <SafeText>{member.department}</SafeText>
                </Td>
                <Td attention={member.holds.length > 0}>
                  {member.holds.length > 0 ? (
                    <>
                      <SafeText>{member.holds.join(', ')}</SafeText>, still in force
                    </>
                  ) : (
                    <span className="text-soft">None in force</span>
                  )}
                </Td>
                <Td className="whitespace-nowrap">
                  {member.signedOffAt ? <DateTime at={member.signedOffAt} zone={zone} as="date" /> : null}
                </Td>
                <Td className="py-0 text-right whitespace-nowrap">
                  {mayManage ? (
                    <Button kind="quiet" onClick={() => back.mutate(member)}>
                      Sign on again
                    </Button>
                  ) : null}
                </Td>
              </tr>
            ))}
          </Table>
        </Section>
      ) : null}
      {open?.kind === 'edit' ? (
        <CrewDialog vesselId={vesselId} zone={zone} member={open.member} onClose={() => setOpen(null)} />
      ) : null}
      {open?.kind === 'off' ? (
        <SignOffDialog vesselId={vesselId} zone={zone} member={open.member} onClose={() => setOpen(null)} />
      ) : null}
    </>
  );
}

interface SignOffDialogProps {
  vesselId: string;
  zone: string;
  member: CrewView;
  onClose: () => void;
}

/** Signing off: what it means before, and what it exposed after. */
function SignOffDialog({ vesselId, zone, member, onClose }: SignOffDialogProps) {
  const client = useQueryClient();
  const off = useMutation({
    mutationFn: () => signOff(vesselId, member.id),
    onSuccess: () => client.invalidateQueries({ queryKey: ['vessels', vesselId] }),
  });
  if (off.data) {
    return (
      <Dialog
        open
        onClose={onClose}
        title={<SafeText>{`${member.name} is signed off`}</SafeText>}
        actions={
          <Button kind="primary" onClick={onClose}>
            Done
          </Button>
        }
      >
        {off.data.exposed.length === 0 ? (
          <p>They knew no passphrase in force, so nothing has to change.</p>
        ) : (
          off.data.exposed.map(({ network, changeAt }) => (
            <p key={network}>
              They know the passphrase of <SafeText>{network}</SafeText>.{' '}
              {changeAt ? (
                <>
                  It changes <DateTime at={changeAt} zone={zone} as="words" />.
                </>
              ) : (
                'No change is planned; plan one under Networks.'
              )}
            </p>
          ))
        )}
      </Dialog>
    );
  }
  return (
    <Dialog
      open
      onClose={onClose}
      title={<SafeText>{`Sign ${member.name} off`}</SafeText>}
      actions={
        <>
          <Button onClick={onClose}>Not now</Button>
          <Button kind="primary" onClick={() => off.mutate()} busy={off.isPending && 'Signing off…'}>
            Sign off now
          </Button>
        </>
      }
    >
      <p>
        {member.holds.length > 0 ? (
          <>
            They know the passphrase of <SafeText>{member.holds.join(', ')}</SafeText>. That network is
            exposed from now on, and its change moves up to the next quiet hour.
          </>
        ) : (
          'They know no passphrase in force.'
        )}{' '}
        {member.account ? 'Their sign-in to this vessel ends at once.' : null}
      </p>
      <ErrorLine error={off.error} />
    </Dialog>
  );
}
