import { z } from 'zod';
import { EMAIL_MAX, NAME_MAX, PASSWORD_MAX, PASSWORD_MIN } from '../rules/limits.ts';
import { dealerRole, id, instant, language, nameText, vesselParams, vesselRole } from './common.ts';
import { anonymous, contract, person, vessel } from './contract.ts';

/** One mailbox, in plain ASCII, without the quoting that lets one address hide another. */
export const email = z
  .string()
  .trim()
  .max(EMAIL_MAX, `Keep it to ${EMAIL_MAX} characters`)
  .regex(
    /^[A-Za-z0-9._%+-]{1,64}@[A-Za-z0-9-]{1,63}(\.[A-Za-z0-9-]{1,63}){1,8}$/,
    'Give a mail address such as name@vessel.example',
  );

/** A new password, to the octet as typed: nothing is trimmed or cut. */
export const newPassword = z
  .string()
  .min(PASSWORD_MIN, `Use at least ${PASSWORD_MIN} characters`)
  .max(PASSWORD_MAX, `Keep it to ${PASSWORD_MAX} characters`)
  .refine((text) => !text.includes('\0'), 'Leave out the zero character');

const givenPassword = z
  .string()
  .min(1, 'Give your password')
  .max(PASSWORD_MAX, 'That is longer than any password here');
const code = z.string().trim().min(1, 'Give the code').max(40, 'That is longer than any code here');
const token = z.string().regex(/^[\w-]{20,100}$/, 'This link is not complete. Open it again from the mail');

export const signIn = contract({
  name: 'session.signIn',
  method: 'POST',
  path: '/session',
  summary: 'Sign in; code_needed asks for the second factor and the same again with it',
  access: anonymous,
  body: z.strictObject({ email: z.string().max(EMAIL_MAX), password: givenPassword, code: code.optional() }),
  response: z.strictObject({ endedOldest: z.boolean() }),
});

export const signOut = contract({
  name: 'session.signOut',
  method: 'DELETE',
  path: '/session',
  summary: 'End this session',
  access: person,
  response: 'empty',
});

export const proveIdentity = contract({
  name: 'session.prove',
  method: 'POST',
  path: '/session/proof',
  summary: 'Prove again who is signed in; good for ten minutes on this session',
  access: person,
  secret: true,
  body: z.strictObject({ password: givenPassword, code: code.optional() }),
  response: 'empty',
});

export const askForReset = contract({
  name: 'passwordReset.ask',
  method: 'POST',
  path: '/password-resets',
  summary: 'Have a link mailed that sets a new password; the answer never tells whether the address is known',
  access: anonymous,
  body: z.strictObject({ email: z.string().max(EMAIL_MAX) }),
  response: 'empty',
});

export const resetPassword = contract({
  name: 'passwordReset.use',
  method: 'POST',
  path: '/password-resets/use',
  summary: "Set a new password by the mail's token; does not sign in",
  access: anonymous,
  body: z.strictObject({ token, password: newPassword }),
  response: 'empty',
});

export const invitationView = z.strictObject({
  email: z.string(),
  /** The vessel's or dealer's name. */
  place: z.string(),
  roles: z.array(z.union([vesselRole, dealerRole])),
  /** The address already belongs to somebody here, who only needs to sign in and accept. */
  known: z.boolean(),
  expiresAt: instant,
});
export type InvitationView = z.infer<typeof invitationView>;

export const readInvitation = contract({
  name: 'invitation.read',
  method: 'POST',
  path: '/invitations/read',
  summary: "What an invitation offers, by the mail's token; uses nothing up",
  access: anonymous,
  body: z.strictObject({ token }),
  response: invitationView,
});

export const acceptBody = z.strictObject({
  token,
  /** For somebody new: the name as it will stand in the log. */
  name: nameText(NAME_MAX).optional(),
  /** For somebody new: the password to be. For somebody known: their password. */
  password: newPassword.optional(),
  locale: language.optional(),
});
export type AcceptInvitation = z.infer<typeof acceptBody>;

export const acceptInvitation = contract({
  name: 'invitation.accept',
  method: 'POST',
  path: '/invitations/accept',
  summary: 'Accept an invitation; does not sign in',
  access: anonymous,
  body: acceptBody,
  response: 'empty',
  status: 201,
});

export const changeAccount = contract({
  name: 'account.change',
  method: 'PATCH',
  path: '/account',
  summary: "Change one's own name and language",
  access: person,
  body: z.strictObject({ name: nameText(NAME_MAX), locale: language }),
  response: 'empty',
});

export const changePassword = contract({
  name: 'account.changePassword',
  method: 'PUT',
  path: '/account/password',
  summary: "Change one's own password; every other session ends",
  access: person,
  secret: true,
  body: z.strictObject({ current: givenPassword, password: newPassword }),
  response: 'empty',
});

export const enrolmentView = z.strictObject({ secret: z.string(), uri: z.string() });
export type Enrolment = z.infer<typeof enrolmentView>;

export const beginSecondFactor = contract({
  name: 'account.beginSecondFactor',
  method: 'POST',
  path: '/account/second-factor',
  summary: 'Begin enrolling a second factor (RFC 6238); it counts once a code has been given',
  access: person,
  fresh: true,
  secret: true,
  response: enrolmentView,
});

export const finishSecondFactor = contract({
  name: 'account.finishSecondFactor',
  method: 'PUT',
  path: '/account/second-factor',
  summary: 'End the enrolment with a code; answers the recovery codes, shown this once',
  access: person,
  fresh: true,
  secret: true,
  body: z.strictObject({ code }),
  response: z.strictObject({ recoveryCodes: z.array(z.string()) }),
});

export const removeSecondFactor = contract({
  name: 'account.removeSecondFactor',
  method: 'DELETE',
  path: '/account/second-factor',
  summary: 'Take the second factor away, with password and code',
  access: person,
  secret: true,
  body: z.strictObject({ password: givenPassword, code }),
  response: 'empty',
});

export const deviceView = z.strictObject({
  id,
  /** In plain words, such as "Chromium on Android". */
  label: z.string(),
  createdAt: instant,
  lastSeenAt: instant,
  current: z.boolean(),
});
export type DeviceView = z.infer<typeof deviceView>;

export const listDevices = contract({
  name: 'account.devices',
  method: 'GET',
  path: '/account/sessions',
  summary: 'Where the person is signed in',
  access: person,
  response: z.strictObject({ items: z.array(deviceView) }),
});

export const endDevice = contract({
  name: 'account.endDevice',
  method: 'DELETE',
  path: '/account/sessions/:sessionId',
  summary: "End one of one's own sessions",
  access: person,
  params: z.strictObject({ sessionId: id }),
  response: 'empty',
});

export const endAllDevices = contract({
  name: 'account.endAllDevices',
  method: 'DELETE',
  path: '/account/sessions',
  summary: "End every session of one's own, this one too, and forget known devices",
  access: person,
  response: 'empty',
});

export const memberView = z.strictObject({
  personId: id,
  name: z.string(),
  email: z.string(),
  roles: z.array(vesselRole),
  suspended: z.boolean(),
  secondFactor: z.boolean(),
});
export type MemberView = z.infer<typeof memberView>;

export const openInvitationView = z.strictObject({
  id,
  email: z.string(),
  name: z.string().nullable(),
  roles: z.array(vesselRole),
  createdAt: instant,
  expiresAt: instant,
  /** What became of its mail. */
  mail: z.enum(['waiting', 'sent', 'not_delivered']),
});
export type OpenInvitationView = z.infer<typeof openInvitationView>;

export const listMembers = contract({
  name: 'members.list',
  method: 'GET',
  path: '/vessels/:vesselId/members',
  summary: 'Who has which role on the vessel, and open invitations',
  access: vessel('members.view'),
  params: vesselParams,
  response: z.strictObject({ members: z.array(memberView), invitations: z.array(openInvitationView) }),
});

/** Being trusted with the owner's network only adds to a role: alone it opens no page. */
const rolesAboard = z
  .array(vesselRole)
  .max(6)
  .refine(
    (roles) => roles.length === 0 || roles.some((role) => role !== 'owner_keeper'),
    "Choose another role as well: being trusted with the owner's network only adds to one",
  );

export const inviteBody = z.strictObject({
  email,
  name: nameText(NAME_MAX).optional(),
  roles: rolesAboard.min(1, 'Choose at least one role'),
});

export const inviteMember = contract({
  name: 'members.invite',
  method: 'POST',
  path: '/vessels/:vesselId/invitations',
  summary: 'Invite somebody by mail, once, for 72 hours',
  access: vessel('members.manage'),
  fresh: true,
  params: vesselParams,
  body: inviteBody,
  response: z.strictObject({ id }),
  status: 201,
});

export const withdrawInvitation = contract({
  name: 'members.withdrawInvitation',
  method: 'DELETE',
  path: '/vessels/:vesselId/invitations/:invitationId',
  summary: 'Withdraw an open invitation',
  access: vessel('members.manage'),
  params: vesselParams.extend({ invitationId: id }),
  response: 'empty',
});

export const setRoles = contract({
  name: 'members.setRoles',
  method: 'PUT',
  path: '/vessels/:vesselId/members/:personId',
  summary: "Set a person's roles on the vessel; none ends their place on her at once",
  access: vessel('members.manage'),
  fresh: true,
  params: vesselParams.extend({ personId: id }),
  body: z.strictObject({ roles: rolesAboard, suspended: z.boolean() }),
  response: 'empty',
});
