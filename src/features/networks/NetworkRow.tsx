import type { ReactNode } from 'react';
import { Link } from 'react-router-dom';
import type { NetworkView } from '../../../shared/api/networks.ts';
import type { VoyageView } from '../../../shared/api/voyages.ts';
import { AgeScale } from '../../components/AgeScale.tsx';
import { DateTime } from '../../components/DateTime.tsx';
import { Flag } from '../../components/Flag.tsx';
import { SafeText } from '../../components/SafeText.tsx';
import { ChangeLines } from './ChangeLines.tsx';
import { AUDIENCE_LINE } from './words.ts';

interface NetworkRowProps {
  vesselId: string;
  network: NetworkView;
  zone: string;
  voyages: readonly VoyageView[];
  mayEnter: boolean;
  crossingUntil: string | null;
  /** What can be done with it, at the right. */
  actions: ReactNode;
}

/** One network at a glance: who it is for, how old its passphrase is, when it changes, who holds it. */
export function NetworkRow({
  vesselId,
  network,
  zone,
  voyages,
  mayEnter,
  crossingUntil,
  actions,
}: NetworkRowProps) {
  const { live, policy, carriesEquipment } = network;
  return (
    <li className="grid grid-cols-[auto_1fr] items-center gap-x-5 gap-y-4 border-b border-rule py-5 md:grid-cols-[auto_1fr_minmax(0,18rem)_9rem] xl:grid-cols-[auto_15rem_minmax(0,31rem)_minmax(14rem,1fr)_11rem] xl:gap-x-6">
      <div className="md:col-start-1 md:row-start-1">
        <Flag audience={network.audience} size="large" word={false} />
      </div>
      <div className="min-w-0 md:col-start-2 md:row-start-1">
        <h2 className="text-lg leading-snug font-semibold break-words">
          <Link
            to={`/vessels/${vesselId}/networks/${network.id}`}
            className="-my-1 inline-block py-1 underline-offset-4 hover:underline"
          >
            <SafeText>{network.ssid}</SafeText>
          </Link>
        </h2>
        <p className="text-sm text-soft">{AUDIENCE_LINE[network.audience]}</p>
        {carriesEquipment ? <p className="text-sm">Carries equipment</p> : null}
      </div>
      <div className="col-span-2 row-start-2 md:col-span-4 xl:col-span-1 xl:col-start-3 xl:row-start-1">
        {live ? (
          <AgeScale days={live.ageDays} limitDays={policy.ageLimitDays} />
        ) : (
          <p className="text-soft">No passphrase on record, so its age cannot be told.</p>
        )}
      </div>
      <div className="col-span-2 text-sm md:col-span-1 md:col-start-3 md:row-start-1 xl:col-start-4">
        <ChangeLines {...{ vesselId, network, zone, voyages, mayEnter }} />
        {carriesEquipment ? <EquipmentLine crossingUntil={crossingUntil} zone={zone} /> : null}
      </div>
      <div className="col-span-2 flex gap-2 *:grow md:col-span-1 md:col-start-4 md:row-start-1 md:flex-col xl:col-start-5">
        {actions}
      </div>
    </li>
  );
}

/** Why a network with equipment cannot be changed just now, or when it could not be. */
export function EquipmentLine({ crossingUntil, zone }: { crossingUntil: string | null; zone: string }) {
  return (
    <p className="mt-1 text-soft">
      {crossingUntil ? (
        <>
          Not changed until the crossing ends, <DateTime at={crossingUntil} zone={zone} as="words" />:
          equipment on this network could lose its link under way.
        </>
      ) : (
        'Never changed during a crossing, and only with the ETO.'
      )}
    </p>
  );
}
