import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { OpenInvitationView } from '../../../shared/api/auth.ts';
import { Button } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { useNotices } from '../../components/Notices.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { Attention } from '../../components/Sentence.tsx';
import { sentenceFor } from '../../lib/errors.ts';
import { rolesInWords } from '../../lib/roleWords.ts';
import { visibleText } from '../../lib/safeText.ts';
import { invite, membersQuery, withdrawInvitation } from './queries.ts';

interface InvitationsProps {
  vesselId: string;
  zone: string;
  invitations: readonly OpenInvitationView[];
  mayManage: boolean;
}

/** Invitations nobody has accepted yet, and what became of their mail. */
export function Invitations({ vesselId, zone, invitations, mayManage }: InvitationsProps) {
  const client = useQueryClient();
  const { say } = useNotices();
  const again = () => client.invalidateQueries({ queryKey: membersQuery(vesselId).queryKey });
  const withdraw = useMutation({
    mutationFn: ({ id }: OpenInvitationView) => withdrawInvitation(vesselId, id),
    onSuccess: () => say('The invitation is withdrawn; the link in its mail no longer works.'),
    onError: (error) => say(sentenceFor(error)),
    // It may have been accepted or withdrawn meanwhile.
    onSettled: again,
  });
  const resend = useMutation({
    mutationFn: ({ email, name, roles }: OpenInvitationView) =>
      invite(vesselId, { email, roles, ...(name ? { name } : {}) }),
    onSuccess: () => say('A new invitation is on its way; the earlier link no longer works.'),
    onError: (error) => say(sentenceFor(error)),
    onSettled: again,
  });
  if (invitations.length === 0) return <p className="text-soft">No invitation is open.</p>;
  return (
    <ul className="m-0 max-w-3xl list-none border-t border-rule p-0">
      {invitations.map((invitation) => {
        const who = visibleText(invitation.name ?? invitation.email);
        const busyWith = (variables: OpenInvitationView | undefined) => variables?.id === invitation.id;
        return (
          <li
            key={invitation.id}
            className="flex flex-wrap items-center justify-between gap-x-6 gap-y-1 border-b border-rule py-2"
          >
            <div className="min-w-0">
              <p className="font-medium break-words">
                <SafeText>{invitation.name ?? invitation.email}</SafeText>
              </p>
              <p>{rolesInWords(invitation.roles)}</p>
              {mayManage ? (
                <p className="text-sm break-words text-soft">
                  {invitation.name ? (
                    <>
                      <SafeText>{invitation.email}</SafeText>,{' '}
                    </>
                  ) : null}
                  <MailState mail={invitation.mail} />, good until{' '}
                  <DateTime at={invitation.expiresAt} zone={zone} />
                </p>
              ) : null}
            </div>
            {mayManage ? (
              <div className="flex flex-wrap gap-2">
                {invitation.mail === 'waiting' ? null : (
                  <Button
                    aria-label={`Send again, to ${who}`}
                    onClick={() => resend.mutate(invitation)}
                    busy={resend.isPending && busyWith(resend.variables) && 'Sending…'}
                  >
                    Send again
                  </Button>
                )}
                <Button
                  kind="quiet"
                  aria-label={`Withdraw the invitation to ${who}`}
                  onClick={() => withdraw.mutate(invitation)}
                  busy={withdraw.isPending && busyWith(withdraw.variables) && 'Withdrawing…'}
                >
                  Withdraw
                </Button>
              </div>
            ) : null}
          </li>
        );
      })}
    </ul>
  );
}

function MailState({ mail }: { mail: OpenInvitationView['mail'] }) {
  if (mail === 'not_delivered') return <Attention>mail not delivered</Attention>;
  return <>{mail === 'sent' ? 'mail sent' : 'mail waiting to go out'}</>;
}
