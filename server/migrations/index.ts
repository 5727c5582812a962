import type { Migration } from '../db/migration.ts';
import { migration as people } from './0001_people.ts';
import { migration as networks } from './0002_networks.ts';
import { migration as aboard } from './0003_people_aboard.ts';
import { migration as guard } from './0004_guard.ts';
import { migration as clockwork } from './0005_clockwork.ts';
import { migration as takesOver } from './0006_takes_over.ts';
import { migration as lastCheckpoint } from './0007_last_checkpoint.ts';
import { migration as fencesOnce } from './0008_fences_once.ts';
import { migration as leanRotations } from './0009_lean_rotations.ts';
import { migration as askedAgain } from './0010_asked_again.ts';

/** In the order in which they run. A migration that has run anywhere is never edited again. */
export const migrations: readonly Migration[] = [
  people,
  networks,
  aboard,
  guard,
  clockwork,
  takesOver,
  lastCheckpoint,
  fencesOnce,
  leanRotations,
  askedAgain,
];
