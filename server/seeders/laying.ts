import type { Security, Source } from '../../shared/api/common.ts';
import type { Audience } from '../../shared/rules/permissions.ts';
import type { QuietHours } from '../../shared/rules/quietHours.ts';
import type { Tx } from '../db/connection.ts';
import type { LogEvent } from '../handovers/appendLog.ts';
import type { Services } from '../services.ts';
import type { Calendar } from './calendar.ts';
import type { Dice } from './dice.ts';
import type { Rows } from './rows.ts';

/** What the whole laying shares. */
export interface Laying {
  readonly services: Services;
  readonly tx: Tx;
  readonly now: Date;
  readonly dice: Dice;
  readonly rows: Rows;
  readonly log: LogEvent[];
  readonly handovers: WaitingHandover[];
  readonly dealerId: string;
}

export interface CrewPlan {
  readonly name: string;
  readonly position: string;
  readonly department?: string;
  readonly email?: string;
  readonly signedOnDays: number;
  readonly signedOffAt?: Date;
}

export interface NetworkPlan {
  readonly audience: Audience;
  readonly ssid: string;
  readonly security: Security;
  readonly liveAt: Date;
  readonly limitDays: number;
  /** Typed in by hand, with the guesses it is worth in bits; made by Quayword where there is none. */
  readonly typed?: { readonly passphrase: string; readonly bits: number };
  readonly quietHours: readonly QuietHours[];
  /** False where nobody has set what moves a change up. */
  readonly movesUp: boolean;
}

export interface VesselPlan {
  readonly name: string;
  readonly kind: string;
  readonly lengthM: number;
  readonly guestsMax: number;
  readonly homePort: string;
  readonly ownerName: string;
  readonly lying: string;
  readonly zone: string;
  readonly source: Source;
  readonly driver: 'by_hand' | 'rehearsal';
  readonly lastHeardAt: Date;
  readonly lastSerial?: number;
  readonly accessPoints: readonly { readonly name: string; readonly deck?: string }[];
  readonly networks: readonly NetworkPlan[];
  readonly crew: readonly CrewPlan[];
}

export interface LaidNetwork extends NetworkPlan {
  readonly id: string;
  readonly passphraseId: string;
}

export interface LaidVessel {
  readonly id: string;
  readonly plan: VesselPlan;
  readonly calendar: Calendar;
  readonly accessPointIds: readonly string[];
  readonly crew: readonly (CrewPlan & { readonly id: string })[];
  readonly networks: readonly LaidNetwork[];
}

export const DEFAULT_QUIET: readonly QuietHours[] = [
  { days: [1, 2, 3, 4, 5, 6, 7], from: '10:30', to: '11:30' },
];
export const networkOf = (vessel: LaidVessel, audience: Audience): LaidNetwork => {
  const found = vessel.networks.find((network) => network.audience === audience);
  if (!found) throw new Error(`${vessel.plan.name} has no ${audience} network`);
  return found;
};

type Channel = 'card' | 'screen' | 'own_page' | 'reveal';

export interface Given {
  readonly kind: 'guest' | 'crew';
  readonly id: string;
  readonly name: string | null;
  readonly label?: string;
  readonly channel: Channel;
  readonly at: Date;
  readonly departedAt?: Date | null;
  readonly card?: { readonly id: string; readonly serial: string };
  readonly by?: { readonly id: string; readonly name: string } | null;
}

/** One handover to be written down once the people and cards it names are there. */
export interface WaitingHandover extends Given {
  readonly vesselId: string;
  readonly networkId: string;
  readonly passphraseId: string;
}
