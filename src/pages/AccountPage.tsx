import { useMutation, useQuery } from '@tanstack/react-query';
import { useNavigate } from 'react-router-dom';
import { Button } from '../components/Button.tsx';
import { Page, Section } from '../components/Page.tsx';
import { Loading } from '../components/PageState.tsx';
import { Sentence } from '../components/Sentence.tsx';
import { Devices } from '../features/auth/Devices.tsx';
import { FormError } from '../features/auth/FormError.tsx';
import { PasswordForm } from '../features/auth/PasswordForm.tsx';
import { PersonForm } from '../features/auth/PersonForm.tsx';
import { devicesQuery, endAllDevices, sessionQuery } from '../features/auth/queries.ts';
import { SecondFactor } from '../features/auth/SecondFactor.tsx';
import { startLoad } from '../lib/queryClient.ts';
import { goAndForget, tellOtherTabs } from '../lib/signedOut.ts';
import { useTitle } from '../lib/useTitle.ts';

export function accountLoader() {
  startLoad(devicesQuery);
  return null;
}

/** `/account` */
export function AccountPage() {
  const navigate = useNavigate();
  const { data: session } = useQuery(sessionQuery);
  const endAll = useMutation({
    mutationFn: endAllDevices,
    onSuccess: () => {
      tellOtherTabs();
      void goAndForget(() => navigate('/sign-in', { replace: true }));
    },
  });
  useTitle('Your account');
  if (!session) return <Loading />;
  return (
    <Page className="max-w-5xl">
      <Sentence>Your name, your password, and where you are signed in.</Sentence>
      <Section aside title="Name and language">
        <PersonForm key={session.person.id} person={session.person} />
      </Section>
      <Section aside title="Password">
        <PasswordForm email={session.person.email} />
      </Section>
      <Section aside title="Second factor">
        <SecondFactor state={session.secondFactor} />
      </Section>
      <Section aside title="Where you are signed in">
        <Devices />
        <FormError error={endAll.error} />
        <Button
          className="self-start"
          onClick={() => endAll.mutate()}
          busy={endAll.isPending && 'Signing out…'}
        >
          Sign out everywhere, here too
        </Button>
      </Section>
    </Page>
  );
}
