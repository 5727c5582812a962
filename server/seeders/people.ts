import { randomInt } from 'node:crypto';
import type { DealerRole, VesselRole } from '../../shared/rules/permissions.ts';
import { WORDS } from '../passphrases/wordList.ts';

export interface DemoPerson {
  readonly name: string;
  readonly email: string;
  readonly roles: readonly (VesselRole | DealerRole)[];
  /** Null for the dealer's own. */
  readonly vessel: string | null;
  readonly position: string;
  readonly department: string;
}

export const TAMARISK_PEOPLE: readonly DemoPerson[] = [
  {
    name: 'Dorotea Valck',
    email: 'dorotea.valck@tamarisk.example',
    roles: ['captain'],
    vessel: 'Tamarisk',
    position: 'Captain',
    department: 'Deck',
  },
  {
    name: 'Maud Tellier',
    email: 'maud.tellier@tamarisk.example',
    roles: ['chief_stew'],
    vessel: 'Tamarisk',
    position: 'Chief stew',
    department: 'Interior',
  },
  {
    name: 'Ines Okafor-Lund',
    email: 'ines.okafor-lund@tamarisk.example',
    roles: ['purser'],
    vessel: 'Tamarisk',
    position: 'Purser',
    department: 'Interior',
  },
  {
    name: 'Hamish Adeyemi',
    email: 'hamish.adeyemi@tamarisk.example',
    roles: ['eto'],
    vessel: 'Tamarisk',
    position: 'ETO',
    department: 'Engine',
  },
  {
    name: 'Kaito Ferreira',
    email: 'kaito.ferreira@tamarisk.example',
    roles: ['crew'],
    vessel: 'Tamarisk',
    position: 'Deckhand',
    department: 'Deck',
  },
];

export const STORY_CAPTAINS: readonly DemoPerson[] = [
  {
    name: 'Leocadia Brunt',
    email: 'leocadia.brunt@corvina.example',
    roles: ['captain'],
    vessel: 'Corvina',
    position: 'Captain',
    department: 'Deck',
  },
  {
    name: 'Tomasz Achterberg',
    email: 'tomasz.achterberg@anselma.example',
    roles: ['captain'],
    vessel: 'Anselma',
    position: 'Captain',
    department: 'Deck',
  },
];

export const SERVICE_DESK: DemoPerson = {
  name: 'Joaquim Sato',
  email: 'joaquim.sato@haldenroe.example',
  roles: ['service_desk'],
  vessel: null,
  position: 'Service desk',
  department: '',
};

export const DEMO_PEOPLE: readonly DemoPerson[] = [SERVICE_DESK, ...TAMARISK_PEOPLE, ...STORY_CAPTAINS];

/** Three words and two digits from `crypto`, 45 bits: easy to type from a screen, guessed only online. */
export function demoPassword(): string {
  const word = () => WORDS[randomInt(WORDS.length)] ?? 'harbour';
  return `${word()}-${word()}-${word()}-${randomInt(10, 100)}`;
}
