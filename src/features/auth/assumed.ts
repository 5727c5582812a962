import type { Language } from '../../../shared/api/common.ts';
import type { DealerRole, VesselRole } from '../../../shared/rules/permissions.ts';

export interface InvitationView {
  email: string;
  /** The vessel's or dealer's name. */
  place: string;
  roles: (VesselRole | DealerRole)[];
  /** The address already belongs to somebody here, who only needs to accept. */
  known: boolean;
  expiresAt: string;
}
export interface AcceptInvitation {
  token: string;
  name?: string;
  password?: string;
  locale?: Language;
}
export interface DeviceView {
  id: string;
  label: string;
  createdAt: string;
  lastSeenAt: string;
  current: boolean;
}
export interface Enrolment {
  secret: string;
  uri: string;
}
