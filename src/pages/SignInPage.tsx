import { useNavigate } from 'react-router-dom';
import { PlainFrame } from '../components/PlainFrame.tsx';
import { SignInForm } from '../features/auth/SignInForm.tsx';
import { takeRememberedPlace } from '../lib/rememberedPlace.ts';
import { useTitle } from '../lib/useTitle.ts';

/** `/sign-in` */
export function SignInPage() {
  const navigate = useNavigate();
  useTitle('Sign in');
  return (
    <PlainFrame title="Sign in">
      <SignInForm onDone={() => void navigate(takeRememberedPlace(), { replace: true })} />
    </PlainFrame>
  );
}
