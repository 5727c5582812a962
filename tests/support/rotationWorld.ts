import {
  goingBack,
  isUnderWay,
  mayPurge,
  type Rotation,
  type Target,
  type Ticket,
  toTry,
} from '../../shared/rules/rotation.ts';
import { step } from '../../shared/rules/rotationStep.ts';

/** What is under test: the rules as they are, or with one natural shortcut taken. */
export interface Rules {
  readonly step: typeof step;
  readonly toTry: typeof toTry;
  readonly mayPurge: typeof mayPurge;
  /** Whether the boat puts aside an order with a smaller number than the one it has. */
  readonly fencing: boolean;
}

export const RULES: Rules = { step, toTry, mayPurge, fencing: true };

export const POINTS = ['salon', 'sundeck'] as const;
export type Point = (typeof POINTS)[number];

export type Command =
  | {
      readonly do:
        | 'plan'
        | 'stage'
        | 'cancel'
        | 'handOut'
        | 'disclose'
        | 'begin'
        | 'missing'
        | 'giveUp'
        | 'purge';
    }
  | { readonly do: 'wait'; readonly days: number }
  /** `which` counts back from the newest message. */
  | { readonly do: 'deliver'; readonly which: number }
  | { readonly do: 'apply' | 'report'; readonly point: Point }
  | { readonly do: 'receive'; readonly which: number };

interface Order {
  readonly ticket: Ticket;
  readonly from: string | null;
  readonly to: string;
}
interface Report {
  readonly ticket: Ticket;
  readonly point: Point;
  readonly seen: Target['seen'];
}

/**
 * The guard's small model: one network, two access points, a boat that may be late, and a sea that loses,
 * repeats and delays every message. Messages are never removed, so each can arrive any number of times.
 */
export class World {
  private now = Date.UTC(2026, 5, 14);
  private codes = 1;
  private tickets = 0;
  live = 'code-1';
  private liveRotation: Rotation | null = null;
  open: Rotation | null = null;
  readonly runs = new Map<Point, string>(POINTS.map((point) => [point, 'code-1']));
  readonly kept = new Set(['code-1']);
  private readonly retired = new Map<string, Date>();
  private readonly orders: Order[] = [];
  private readonly reports: Report[] = [];
  private boat: Order | null = null;
  private readonly targetOf = new Map<number, string>();
  violation: string | null = null;

  constructor(private readonly rules: Rules) {}

  take(command: Command): void {
    this.act(command);
    this.check();
  }

  private act(command: Command): void {
    const open = this.open;
    switch (command.do) {
      case 'wait':
        this.now += command.days * 86_400_000;
        return;
      case 'plan':
        if (!open) this.open = this.planned();
        return;
      case 'stage': {
        if (open?.state !== 'planned') return;
        const to = this.newCode();
        const ticket = { epoch: 1, number: ++this.tickets };
        if (this.step({ kind: 'stage', ticket, to, targets: POINTS })) this.kept.add(to);
        return;
      }
      case 'handOut': {
        const reportBy = new Date(this.now + 86_400_000);
        if (this.step({ kind: 'handOut', reportBy, crossing: false })) this.send();
        return;
      }
      case 'disclose':
        this.step({ kind: 'disclose', way: 'journal' });
        this.step({ kind: 'disclose', way: 'officer' });
        return;
      case 'begin':
        this.step({ kind: 'begin' });
        return;
      case 'cancel':
        this.step({ kind: 'cancel' });
        return;
      case 'missing':
        this.step({ kind: 'reportMissing' });
        return;
      case 'giveUp':
        this.giveUp();
        return;
      case 'purge':
        this.purge();
        return;
      case 'deliver': {
        const order = this.orders.at(-1 - (command.which % Math.max(1, this.orders.length)));
        const older = order && this.boat && order.ticket.number < this.boat.ticket.number;
        if (order && !(older && this.rules.fencing)) this.boat = order;
        return;
      }
      case 'apply':
        if (this.boat) this.runs.set(command.point, this.boat.to);
        return;
      case 'report': {
        if (!this.boat) return;
        const runs = this.runs.get(command.point);
        const seen = runs === this.boat.to ? 'new' : runs === this.boat.from ? 'old' : 'other';
        this.reports.push({ ticket: this.boat.ticket, point: command.point, seen });
        return;
      }
      case 'receive': {
        const report = this.reports.at(-1 - (command.which % Math.max(1, this.reports.length)));
        if (!report?.seen) return;
        const { ticket, point, seen } = report;
        this.step({ kind: 'observe', ticket, accessPointId: point, seen, evidence: 'E1' });
      }
    }
  }

  private newCode(): string {
    this.codes += 1;
    return `code-${this.codes}`;
  }

  private planned(): Rotation {
    return {
      state: 'planned',
      mode: 'graceful',
      driver: 'rehearsal',
      ticket: null,
      from: this.live,
      to: null,
      dueAt: new Date(this.now),
      takesOver: false,
      handedOutAt: null,
      reportBy: null,
      targets: [],
      ways: [],
      waivedBy: null,
      detail: null,
    };
  }

  private step(action: Parameters<typeof step>[1]): boolean {
    if (!this.open) return false;
    const outcome = this.rules.step(this.open, action, new Date(this.now));
    if (!outcome.ok) return false;
    const { next } = outcome;
    const began = action.kind === 'begin' && this.open.state !== 'applying';
    if (began && !(next.ways.includes('journal') && next.ways.includes('officer'))) {
      this.violation ??= 'D1: started before two ways aboard were confirmed';
    }
    this.open = next;
    if (next.to !== null) this.kept.add(next.to);
    if (next.state === 'live') this.comeIntoForce(next);
    else if (next.state === 'cancelled') this.open = null;
    return true;
  }

  private send(): void {
    const { ticket, from, to } = this.open ?? {};
    if (ticket && to) this.orders.push({ ticket, from: from ?? null, to });
  }

  private giveUp(): void {
    const { open } = this;
    if (!open || open.handedOutAt === null) return;
    const ticket = { epoch: 1, number: this.tickets + 1 };
    if (!this.step({ kind: 'supersede', by: ticket })) return;
    this.tickets += 1;
    this.open = goingBack(open, ticket, POINTS, new Date(this.now));
  }

  private comeIntoForce(rotation: Rotation): void {
    for (const [point, code] of this.runs) {
      if (code !== rotation.to) this.violation ??= `I3: in force, but ${point} runs ${code}`;
    }
    for (const code of [rotation.from, this.live]) {
      if (code !== null && code !== rotation.to) this.retired.set(code, new Date(this.now));
    }
    this.live = rotation.to ?? this.live;
    this.retired.delete(this.live);
    this.liveRotation = rotation;
    this.open = null;
  }

  private purge(): void {
    const uses = (code: string) => this.open !== null && (this.open.from === code || this.open.to === code);
    for (const code of this.kept) {
      const at = this.retired.get(code) ?? new Date(this.now);
      if (this.rules.mayPurge(at, this.liveRotation, uses(code), new Date(this.now))) this.kept.delete(code);
    }
  }

  private check(): void {
    const { open } = this;
    const listed =
      open && (isUnderWay(open.state) || open.takesOver)
        ? this.rules.toTry(open, new Date(this.now)).map((which) => (which === 'new' ? open.to : open.from))
        : [this.live];
    for (const [point, code] of this.runs) {
      if (!this.kept.has(code)) this.violation ??= `I1: ${point} runs ${code}, which nobody keeps`;
      if (!listed.includes(code)) this.violation ??= `I2: ${point} runs ${code}, which no screen lists`;
    }
    if (open?.ticket && open.to) {
      const known = this.targetOf.get(open.ticket.number);
      if (known !== undefined && known !== open.to)
        this.violation ??= 'I5: a ticket was given a second passphrase';
      this.targetOf.set(open.ticket.number, open.to);
    }
  }
}
