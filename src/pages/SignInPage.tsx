import { useQueryClient } from '@tanstack/react-query';
import { useNavigate } from 'react-router-dom';
import { useNotices } from '../components/Notices.tsx';
import { PlainFrame } from '../components/PlainFrame.tsx';
import { SignInForm } from '../features/auth/SignInForm.tsx';
import { takeRememberedPlace } from '../lib/rememberedPlace.ts';
import { useTitle } from '../lib/useTitle.ts';

/** `/sign-in` */
export function SignInPage() {
  const navigate = useNavigate();
  const client = useQueryClient();
  const notices = useNotices();
  useTitle('Sign in');
  const done = ({ endedOldest }: { endedOldest: boolean }) => {
    client.clear();
    if (endedOldest)
      notices.say('You were signed in on too many devices, so the oldest one has been signed out.');
    void navigate(takeRememberedPlace(), { replace: true });
  };
  return (
    <PlainFrame title="Sign in">
      <SignInForm onDone={done} />
    </PlainFrame>
  );
}
