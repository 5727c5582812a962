import { useMutation, useQueryClient } from '@tanstack/react-query';
import { useState } from 'react';
import type { MemberView } from '../../../shared/api/auth.ts';
import { Button } from '../../components/Button.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { rolesInWords } from '../../lib/roleWords.ts';
import { visibleText } from '../../lib/safeText.ts';
import { type Invite, invite, setRoles } from './queries.ts';
import { RolesDialog, type Wanted } from './RolesDialog.tsx';

interface MemberListProps {
  vesselId: string;
  /** Who is signed in. */
  personId: string;
  members: readonly MemberView[];
  mayManage: boolean;
}

/** Who has which role aboard. Those who may not manage roles see names and roles only. */
export function MemberList({ vesselId, personId, members, mayManage }: MemberListProps) {
  const client = useQueryClient();
  const { say, undoable } = useNotices();
  const [open, setOpen] = useState<MemberView | null>(null);
  const again = () => client.invalidateQueries({ queryKey: ['vessels', vesselId] });
  const put = useMutation({
    mutationFn: ({ member, wanted }: { member: MemberView; wanted: Wanted }) =>
      setRoles(vesselId, member.personId, wanted),
    onSuccess: again,
    onError: (error) => say(sentenceFor(error)),
  });
  const inviteAgain = useMutation({
    mutationFn: (given: Invite) => invite(vesselId, given),
    onSuccess: async (_made, { email }) => {
      await again();
      say(
        <>
          The invitation to <SafeText>{email}</SafeText> is on its way.
        </>,
      );
    },
    onError: (error) => say(sentenceFor(error)),
  });
  const save = async (member: MemberView, wanted: Wanted) => {
    await setRoles(vesselId, member.personId, wanted);
    // One's own roles decide which pages there are.
    if (member.personId === personId) await client.invalidateQueries({ queryKey: ['session'], exact: true });
    else await again();
    const { name, email, roles, suspended } = member;
    if (member.personId === personId) {
      say('Your roles are changed.');
    } else if (wanted.roles.length === 0) {
      undoable(
        <>
          <SafeText>{name}</SafeText> has no place aboard any more.
        </>,
        () => inviteAgain.mutate({ email, name, roles }),
        'Invite again',
      );
    } else {
      undoable(
        <>
          The roles of <SafeText>{name}</SafeText> are changed.
        </>,
        () => put.mutate({ member, wanted: { roles, suspended } }),
      );
    }
  };
  return (
    <>
      <ul className="m-0 max-w-3xl list-none border-t border-rule p-0">
        {members.map((member) => (
          <li
            key={member.personId}
            className="flex flex-wrap items-center justify-between gap-x-6 gap-y-1 border-b border-rule py-2"
          >
            <div className="min-w-0">
              <p>
                <span className="text-lg font-medium">
                  <SafeText>{member.name}</SafeText>
                </span>{' '}
                {member.personId === personId ? <span className="text-soft">you</span> : null}
              </p>
              <p>
                {rolesInWords(member.roles)}
                {member.suspended ? (
                  <>
                    , <Attention>suspended</Attention>
                  </>
                ) : null}
              </p>
              {mayManage ? (
                <p className="text-sm break-words text-soft">
                  <SafeText>{member.email}</SafeText>
                  {member.secondFactor ? ', with a second factor' : ', no second factor'}
                </p>
              ) : null}
            </div>
            {mayManage ? (
              <Button
                aria-label={`Change roles of ${visibleText(member.name)}`}
                onClick={() => setOpen(member)}
              >
                Change roles
              </Button>
            ) : null}
          </li>
        ))}
      </ul>
      {open ? (
        <RolesDialog
          member={open}
          isSelf={open.personId === personId}
          onSave={(wanted) => save(open, wanted)}
          onClose={() => setOpen(null)}
        />
      ) : null}
    </>
  );
}
