/**
 * Readers of the Wi-Fi QR text, written from the published parsers' behaviour and sharing nothing with the
 * writer. Each gives what a phone would store, or undefined where it takes the text for something else.
 */
export interface ReadWifi {
  type: string;
  ssid: string;
  password: string;
  hidden: boolean;
  /** Names of the fields met, in order; empty where the reader does not see fields. */
  fields: string[];
  /** True when the reader switches WPA2 off for this network (transition disable, bit 0 alone). */
  saeOnly: boolean;
}

const SCHEME = 'WIFI:';

/**
 * Android's newer parser (Android 15, WifiUriParser): one character at a time, a backslash makes the next
 * one literal, quotes are literal, white space and empty fields before a field's name are skipped, unknown
 * fields are ignored.
 */
export function readAsNewAndroid(text: string): ReadWifi | undefined {
  if (!text.startsWith(SCHEME)) return undefined;
  const values = new Map<string, string>();
  const fields: string[] = [];
  let at = SCHEME.length;
  while (at < text.length) {
    while (/[\s;]/.test(text.charAt(at))) at++;
    const colon = text.indexOf(':', at);
    if (colon < 0) break;
    const name = text.slice(at, colon);
    at = colon + 1;
    let value = '';
    while (at < text.length && text.charAt(at) !== ';') {
      if (text.charAt(at) === '\\') at++;
      value += text.charAt(at);
      at++;
    }
    at++;
    fields.push(name);
    values.set(name, value);
  }
  return androidResult(values, fields);
}

/**
 * Android's older parser (Settings, WifiQrCode): splits at each semicolon that does not follow a backslash,
 * then undoes backslashes; a value in quotation marks loses them.
 */
export function readAsOldAndroid(text: string): ReadWifi | undefined {
  if (!text.startsWith(SCHEME)) return undefined;
  const values = new Map<string, string>();
  const fields: string[] = [];
  for (const piece of text.slice(SCHEME.length).split(/(?<!\\);/)) {
    const match = /^\s*([^:]*):([\s\S]*)$/.exec(piece);
    if (match === null) continue;
    const [, name = '', raw = ''] = match;
    fields.push(name);
    const plain = raw.replace(/\\([\s\S])/g, '$1');
    const quoted = plain.length > 1 && plain.startsWith('"') && plain.endsWith('"');
    values.set(name, quoted ? plain.slice(1, -1) : plain);
  }
  return androidResult(values, fields);
}

function androidResult(values: Map<string, string>, fields: string[]): ReadWifi | undefined {
  const ssid = values.get('S') ?? '';
  const type = values.get('T') ?? 'nopass';
  const password = values.get('P') ?? '';
  if (ssid === '') return undefined;
  const secured = /^(WEP|WPA|SAE)/.test(type);
  if (!secured && type !== 'nopass') return undefined;
  if (secured && password === '') return undefined;
  return {
    type,
    ssid,
    password,
    hidden: (values.get('H') ?? '').toLowerCase() === 'true',
    fields,
    saeOnly: values.get('R') === '1',
  };
}

/**
 * ZXing (core for Java 3.4.1): looks for each prefix anywhere in the text and takes the first, reads to the
 * next semicolon that is not escaped, undoes backslashes, keeps quotes.
 */
export function readAsZxing(text: string): ReadWifi | undefined {
  if (!text.startsWith(SCHEME)) return undefined;
  const rest = text.slice(SCHEME.length);
  const ssid = firstAfter(rest, 'S:');
  if (ssid === undefined || ssid === '') return undefined;
  return {
    type: firstAfter(rest, 'T:') ?? 'nopass',
    ssid,
    password: firstAfter(rest, 'P:') ?? '',
    hidden: firstAfter(rest, 'H:')?.toLowerCase() === 'true',
    fields: [],
    saeOnly: false,
  };
}

function firstAfter(text: string, prefix: string): string | undefined {
  let from = text.indexOf(prefix);
  while (from >= 0) {
    const start = from + prefix.length;
    let end = start;
    while (end < text.length && text.charAt(end) !== ';') end += text.charAt(end) === '\\' ? 2 : 1;
    if (end < text.length) {
      const value = text.slice(start, end).replace(/\\([\s\S])/g, '$1');
      if (value !== '') return value;
    }
    from = text.indexOf(prefix, start);
  }
  return undefined;
}

/**
 * The Wi-Fi Alliance's grammar (WPA3 specification, section 7, as restated publicly): fixed order, printable
 * octets without the semicolon, percent-encoding undone, backslashes literal.
 */
export function readAsAlliance(text: string): ReadWifi | undefined {
  const grammar =
    /^WIFI:(?:T:(?<type>[A-Za-z0-9+/]*);)?(?:R:(?<r>[0-9a-fA-F]+);)?S:(?<ssid>[ -:<-~]*);(?:(?<hidden>H:true);)?(?:I:[ -:<-~]*;)?(?:P:(?<password>[ -:<-~]*);)?(?:K:[A-Za-z0-9+/=]*;)?;$/;
  const groups = grammar.exec(text)?.groups;
  if (groups === undefined) return undefined;
  const plain = (value: string | undefined): string =>
    (value ?? '').replace(/(?:%[0-9A-Fa-f]{2})+/g, (run) => decodeURIComponent(run));
  return {
    type: groups.type ?? '',
    ssid: plain(groups.ssid),
    password: plain(groups.password),
    hidden: groups.hidden !== undefined,
    fields: [],
    saeOnly: Number.parseInt(groups.r ?? '0', 16) === 1,
  };
}
