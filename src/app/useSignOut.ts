import { useMutation } from '@tanstack/react-query';
import { useNavigate } from 'react-router-dom';
import { signOut } from '../features/auth/queries.ts';
import { goAndForget, tellOtherTabs } from '../lib/signedOut.ts';

/** Ends the session, forgets what was fetched, and goes to the sign-in page. */
export function useSignOut() {
  const navigate = useNavigate();
  return useMutation({
    mutationFn: signOut,
    onSuccess: () => {
      tellOtherTabs();
      void goAndForget(() => navigate('/sign-in', { replace: true }));
    },
  });
}
