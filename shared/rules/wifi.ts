import { checkPassphrase, checkSsid } from './passphrase.ts';

/** How a network is joined; the order is the one screens list them in. */
export const WIFI_SECURITIES = ['wpa2', 'transition', 'wpa3'] as const;
/** `transition` accepts WPA2 and WPA3 phones at once; `wpa3` is SAE only. */
export type WifiSecurity = (typeof WIFI_SECURITIES)[number];

/** How screens call it. */
export const SECURITY_NAMES: Readonly<Record<WifiSecurity, string>> = {
  wpa2: 'WPA2',
  transition: 'WPA2 and WPA3 (transition)',
  wpa3: 'WPA3 only',
};

/** What a join card's QR code says. */
export interface WifiAccess {
  ssid: string;
  passphrase: string;
  security: WifiSecurity;
  hidden: boolean;
}

/**
 * The text a phone's camera reads to join: `WIFI:T:WPA;S:…;P:…;;`.
 *
 * Two written rules exist and disagree (Wi-Fi Alliance WPA3 specification, section 7, with percent-encoding;
 * ZXing's older one with backslashes). Deployed readers, Android's and ZXing's among them, follow the older
 * one for values, so values are escaped by it; everything else is chosen so that both agree:
 *
 * - Fields stand in the order T, R, S, H, P. That is the Alliance's order, and ZXing looks for `S:`, `P:`,
 *   `H:` anywhere in the text and takes the first, so the SSID must come before the passphrase.
 * - A backslash goes before `\ ; , " :`. Escaping the colon keeps an SSID such as `SHIP:A` from being taken
 *   for a field.
 * - An SSID of hex digits alone is written plain. The older rule would put it in double quotes, but the
 *   readers that matter keep the quotes as part of the name; `ssidCautions` warns about it instead.
 * - T is `WPA` for every kind. For a WPA3-only network `R:1` is added (the Alliance's transition-disable bit
 *   for SAE only), which Android honours; `T:SAE` is unknown to some readers and untested on others.
 * - H appears only for a hidden network, as `H:true`.
 *
 * Throws RangeError, without repeating either value, when the SSID or passphrase is not one a network can have.
 */
export function wifiPayload({ ssid, passphrase, security, hidden }: WifiAccess): string {
  const name = checkSsid(ssid);
  if (!name.ok) throw new RangeError(`No QR code can be made for this network's name. ${name.reason}`);
  const secret = checkPassphrase(passphrase);
  if (!secret.ok) throw new RangeError(`No QR code can be made for this passphrase. ${secret.reason}`);
  const fields = [
    'T:WPA',
    ...(security === 'wpa3' ? ['R:1'] : []),
    `S:${escapeValue(ssid)}`,
    ...(hidden ? ['H:true'] : []),
    `P:${escapeValue(passphrase)}`,
  ];
  return `WIFI:${fields.join(';')};;`;
}

function escapeValue(value: string): string {
  return value.replace(/[\\;,":]/g, '\\$&');
}
