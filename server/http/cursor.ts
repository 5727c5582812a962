import { createHmac } from 'node:crypto';
import { AppError } from '../errors.ts';
import type { Services } from '../services.ts';
import { sameText } from './session.ts';

/** A list of one vessel that is paged by key. */
export interface PagedList {
  /** Which list, such as `cards`: a cursor of one list is nothing in another. */
  readonly name: string;
  readonly vesselId: string | null;
}

const signature = (services: Services, { name, vesselId }: PagedList, text: string): string =>
  createHmac('sha256', services.config.fingerprintKey)
    .update(`cursor\0${name}\0${vesselId}\0${text}`)
    .digest('base64url')
    .slice(0, 22);

/** Where the next page begins, signed and bound to the list and the vessel. */
export function writeCursor(services: Services, list: PagedList, key: readonly string[]): string {
  const text = JSON.stringify(key);
  return `${Buffer.from(text).toString('base64url')}.${signature(services, list, text)}`;
}

/** The key a cursor of ours holds. Throws `malformed` for anything else, another vessel's cursor included. */
export function readCursor(services: Services, list: PagedList, cursor: string): readonly string[] {
  const [encoded = '', signed = ''] = cursor.split('.');
  const text = Buffer.from(encoded, 'base64url').toString();
  if (!sameText(signed, signature(services, list, text))) {
    throw new AppError('malformed', 'This page of the list cannot be found. Start again at the newest.');
  }
  return JSON.parse(text) as string[];
}
