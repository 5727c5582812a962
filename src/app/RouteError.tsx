import { useEffect } from 'react';
import { isRouteErrorResponse, Link, useRevalidator, useRouteError } from 'react-router-dom';
import { Button } from '../components/Button.tsx';
import { buttonLook } from '../components/buttonLook.ts';
import { PlainFrame } from '../components/PlainFrame.tsx';
import { ApiError, AwayError, sentenceFor } from '../lib/errors.ts';
import { whenServerReturns } from '../lib/serverState.ts';
import { useTitle } from '../lib/useTitle.ts';

/** What is shown in place of a page that cannot be: not found, server away, or a fault of ours. */
export function RouteError() {
  const error = useRouteError();
  if (error instanceof AwayError) return <Away />;
  if (isNotFound(error)) return <NotFound />;
  if (error instanceof ApiError && error.code === 'second_factor_needed') return <SecondFactorNeeded />;
  return <Fault error={error} />;
}

function isNotFound(error: unknown): boolean {
  return (
    (isRouteErrorResponse(error) && error.status === 404) ||
    (error instanceof ApiError && error.status === 404)
  );
}

function Away() {
  const { revalidate } = useRevalidator();
  useTitle('Server away');
  useEffect(() => whenServerReturns(() => void revalidate()), [revalidate]);
  return (
    <PlainFrame title="Quayword cannot reach its server just now.">
      <p>
        Nothing was lost. This page asks again every few seconds and carries on by itself. If the boat's link
        is down, the passphrases in force stay as they are.
      </p>
      <Button onClick={() => void revalidate()}>Try now</Button>
    </PlainFrame>
  );
}

/** The page for an address that leads nowhere, or to something that is not this person's to see. */
export function NotFound() {
  useTitle('Not found');
  return (
    <PlainFrame title="There is nothing here, or it is not yours to see.">
      <p>The address may be old, or your role aboard may have changed. Start from your first page.</p>
      <Link to="/" className={buttonLook('primary')}>
        Go to your first page
      </Link>
    </PlainFrame>
  );
}

/** Where a vessel or a dealer asks a role for a second factor: the way to set it up comes first. */
function SecondFactorNeeded() {
  useTitle('Second factor');
  return (
    <PlainFrame title="Your role asks for a second factor.">
      <p>
        It is a code from an app on your phone, given beside your password. Set it up on your account page,
        and everything of your role opens. If you have one already, sign out there and sign in with it.
      </p>
      <Link to="/account" className={buttonLook('primary')}>
        Go to your account
      </Link>
    </PlainFrame>
  );
}

function Fault({ error }: { error: unknown }) {
  useTitle('Something went wrong');
  const requestId = error instanceof ApiError ? error.requestId : undefined;
  return (
    <PlainFrame title="Something went wrong.">
      <p role="alert">{sentenceFor(error)}</p>
      {requestId ? (
        <p className="text-sm text-soft">Number to quote when asking for help: {requestId}</p>
      ) : null}
      <div className="flex flex-wrap gap-3">
        <Button kind="primary" onClick={() => window.location.reload()}>
          Load the page again
        </Button>
        <Link to="/" className={buttonLook('secondary')}>
          Go to your first page
        </Link>
      </div>
    </PlainFrame>
  );
}
