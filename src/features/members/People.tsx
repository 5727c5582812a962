import { useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { Button } from '../../components/Button.tsx';
import { PageState } from '../../components/PageState.tsx';
import { Invitations } from './Invitations.tsx';
import { InviteDialog } from './InviteDialog.tsx';
import { MemberList } from './MemberList.tsx';
import { membersQuery } from './queries.ts';

interface PeopleProps {
  vesselId: string;
  zone: string;
  personId: string;
  mayManage: boolean;
}

/** People and roles aboard, and the way to invite more. */
export function People({ vesselId, zone, personId, mayManage }: PeopleProps) {
  const query = useQuery(membersQuery(vesselId));
  const [inviting, setInviting] = useState(false);
  return (
    <PageState query={query} loading="Fetching the people…" failed="The people aboard could not be fetched.">
      {({ members, invitations }) => (
        <>
          {mayManage ? null : (
            <p className="text-sm text-soft">Only the captain invites people and gives or ends roles.</p>
          )}
          <MemberList vesselId={vesselId} personId={personId} members={members} mayManage={mayManage} />
          {mayManage ? (
            <Button className="self-start" onClick={() => setInviting(true)}>
              Invite somebody
            </Button>
          ) : null}
          <h3 className="text-base">Open invitations</h3>
          <Invitations vesselId={vesselId} zone={zone} invitations={invitations} mayManage={mayManage} />
          {inviting ? <InviteDialog vesselId={vesselId} onClose={() => setInviting(false)} /> : null}
        </>
      )}
    </PageState>
  );
}
