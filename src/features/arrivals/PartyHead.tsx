import { useState } from 'react';
import { Link } from 'react-router-dom';
import type { ArrivalsView, PartyView } from '../../../shared/api/arrivals.ts';
import { Button, ButtonLink } from '../../components/Button.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Disclosure } from '../../components/Disclosure.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { SegmentProgress } from '../../components/SegmentProgress.tsx';
import { PartyAshoreDialog } from './PartyAshoreDialog.tsx';
import { PartyDialog } from './PartyDialog.tsx';

interface PartyHeadProps {
  vesselId: string;
  arrivals: ArrivalsView;
  party: PartyView;
  onAddGuest: () => void;
  onPrintAll: () => void;
}

/** The party's name, how many there are and until when, how far handing out has come, and what can be done with it. */
export function PartyHead({ vesselId, arrivals, party, onAddGuest, onPrintAll }: PartyHeadProps) {
  const [dialog, setDialog] = useState<'ashore' | 'edit' | null>(null);
  const { zone } = arrivals;
  const aboard = arrivals.guests.filter(({ ashoreAt }) => ashoreAt === null);
  const served = aboard.filter(({ handover }) => handover !== null).length;
  return (
    <div className="flex flex-col gap-3">
      <div className="flex flex-wrap items-baseline gap-x-4 gap-y-1">
        <h1 className="text-xl">
          <SafeText>{party.name}</SafeText>
        </h1>
        <p className="text-sm text-soft">
          {party.count} {party.count === 1 ? 'guest' : 'guests'},{' '}
          {party.ashoreAt ? (
            <>
              ashore since <DateTime at={party.ashoreAt} zone={zone} as="words" />
            </>
          ) : (
            <>
              aboard <DateTime at={party.arrivesAt} zone={zone} as="words" /> until{' '}
              <DateTime at={party.leavesAt} zone={zone} as="words" />
            </>
          )}
        </p>
        <div className="ml-auto flex flex-wrap gap-1">
          <Others arrivals={arrivals} vesselId={vesselId} party={party} />
          <Disclosure button="More">
            {(close) => (
              <div className="flex flex-col items-start">
                <Button
                  kind="quiet"
                  onClick={() => {
                    close();
                    onAddGuest();
                  }}
                >
                  Add a guest
                </Button>
                <ButtonLink kind="quiet" to={`/vessels/${vesselId}/arrivals/import?party=${party.id}`}>
                  Add from a list
                </ButtonLink>
                <Button
                  kind="quiet"
                  onClick={() => {
                    close();
                    onPrintAll();
                  }}
                >
                  Print cards for everybody
                </Button>
                <Button
                  kind="quiet"
                  onClick={() => {
                    close();
                    setDialog('edit');
                  }}
                >
                  Correct name and times
                </Button>
                {party.ashoreAt ? null : (
                  <Button
                    kind="quiet"
                    onClick={() => {
                      close();
                      setDialog('ashore');
                    }}
                  >
                    The whole party is ashore
                  </Button>
                )}
              </div>
            )}
          </Disclosure>
        </div>
      </div>
      {aboard.length > 0 ? (
        <SegmentProgress done={served} total={aboard.length} label="Guests who have the password" />
      ) : null}
      {dialog === 'ashore' ? (
        <PartyAshoreDialog
          vesselId={vesselId}
          arrivals={arrivals}
          party={party}
          onClose={() => setDialog(null)}
        />
      ) : null}
      {dialog === 'edit' ? (
        <PartyDialog vesselId={vesselId} zone={zone} party={party} onClose={() => setDialog(null)} />
      ) : null}
    </div>
  );
}

/** The way to the parties before and after. */
function Others({
  arrivals,
  vesselId,
  party,
}: {
  arrivals: ArrivalsView;
  vesselId: string;
  party: PartyView;
}) {
  return (
    <Disclosure button="Other parties">
      {(close) => (
        <div className="flex flex-col gap-1">
          {arrivals.parties
            .filter(({ id }) => id !== party.id)
            .map(({ id, name, arrivesAt }) => (
              <Link
                key={id}
                to={`/vessels/${vesselId}/arrivals?party=${id}`}
                onClick={close}
                className="rounded-sm px-2 py-2.5 hover:bg-land"
              >
                <SafeText>{name}</SafeText>
                <span className="block text-sm text-soft">
                  from <DateTime at={arrivesAt} zone={arrivals.zone} />
                </span>
              </Link>
            ))}
          <Link
            to={`/vessels/${vesselId}/arrivals/import`}
            onClick={close}
            className="rounded-sm px-2 py-2.5 text-deep underline underline-offset-4"
          >
            A new party from a list
          </Link>
        </div>
      )}
    </Disclosure>
  );
}
