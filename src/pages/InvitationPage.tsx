import { useMutation, useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { Link } from 'react-router-dom';
import { buttonLook } from '../components/buttonLook.ts';
import { Failed, Loading } from '../components/PageState.tsx';
import { PlainFrame } from '../components/PlainFrame.tsx';
import { SafeText } from '../components/SafeText.tsx';
import { InvitationForm } from '../features/auth/InvitationForm.tsx';
import { acceptInvitation, invitationQuery } from '../features/auth/queries.ts';
import { takeFragmentToken } from '../lib/fragment.ts';
import { useTitle } from '../lib/useTitle.ts';

/** `/invitation#token` */
export function InvitationPage() {
  const [token] = useState(takeFragmentToken);
  const invitation = useQuery({ ...invitationQuery(token), enabled: token !== '' });
  const accept = useMutation({ mutationFn: acceptInvitation });
  useTitle('Invitation');
  if (!token) {
    return (
      <PlainFrame title="This invitation is not whole.">
        <p>The mail program may have cut the link. Open the mail again and press it there.</p>
      </PlainFrame>
    );
  }
  if (accept.isSuccess) {
    return (
      <PlainFrame title="Welcome aboard.">
        <p>Your account is ready. Sign in with your mail address and your password.</p>
        <Link to="/sign-in" className={buttonLook('primary', 'large')}>
          Sign in
        </Link>
      </PlainFrame>
    );
  }
  if (invitation.error) {
    return (
      <PlainFrame title="This invitation cannot be used.">
        <Failed error={invitation.error} />
        <p>An invitation works once and for three days. Ask whoever sent it for a new one.</p>
      </PlainFrame>
    );
  }
  if (!invitation.data) {
    return (
      <PlainFrame title="Invitation">
        <Loading>Reading the invitation…</Loading>
      </PlainFrame>
    );
  }
  return (
    <PlainFrame
      title={
        <>
          You are invited to <SafeText>{invitation.data.place}</SafeText>.
        </>
      }
    >
      <InvitationForm
        invitation={invitation.data}
        error={accept.error}
        busy={accept.isPending}
        onAccept={(given) => accept.mutate({ ...given, token })}
      />
    </PlainFrame>
  );
}
