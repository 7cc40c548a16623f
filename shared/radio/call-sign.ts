/**
 * Amateur call signs, taken apart. The form follows ITU Radio Regulations, Article 19 (19.68, 19.68A,
 * 19.69): a prefix that names the country, a digit, and a suffix that ends in a letter; portable
 * forms and the marks of skimmer receivers are common practice in the trade.
 */
import type { Refusal } from './place.ts';

export interface CallSign {
  /** Everything that belongs to the call, in capitals: "EA8/EI7QSB/P". The key under which a station is counted. */
  call: string;
  /** The full call without anything before or after it: "EI7QSB". */
  base: string;
  /** The parts of the base: "EI", "7", "QSB". Digits are empty in forms such as C6AQRA, several in 8J100QRA. */
  prefix: string;
  digits: string;
  suffix: string;
  /** What stands before the base, and the parts behind it, in order: "EA8" and ["P"]. */
  before: string | null;
  after: readonly string[];
  /** The prefix of the place visited, before or behind the base; null when the station is at home. */
  locationPrefix: string | null;
  /** The digit that tells the call area: of CALL/digit, else of the prefix visited, else of the base; null when none or several. */
  areaDigit: number | null;
  /** /MM at sea and /AM in the air: such a station has no bearing. */
  mobile: 'maritime' | 'aeronautical' | null;
  /** The operator is not at the licensed address: visited prefix, /digit, /P, /M, /A, /MM, /AM. */
  away: boolean;
  /** What position tables are asked for: the base at home, else the visited prefix or prefix and digit ("EA8", "W4"). */
  location: string;
  /** A receiver's mark behind the call: "-#", "-1", "-2-#"; null without one. */
  receiverMark: string | null;
}

interface Parts {
  prefix: string;
  digits: string;
  suffix: string;
}

/** Countries that hold every call beginning with the letter, so that one letter is a whole prefix (19.68). */
const singleLetter = 'BFGIKMNRW';
/** Behind a call, M is mobile, B a beacon, N and R have other uses: these five letters alone name a country there. */
const singleLetterBehind = 'FGIKW';
/** Marks behind a call that would otherwise read as a country's prefix. */
const marks = new Set(['P', 'M', 'MM', 'AM', 'A', 'B', 'R', 'LH', 'QRP', 'QRPP', 'BCN']);
const awayMarks = new Set(['P', 'M', 'MM', 'AM', 'A']);
const longest = 24;

/**
 * Takes a call sign apart, or says in one sentence why it cannot be one. Letter case and surrounding
 * blanks do not matter. Accepts CALL, prefix/CALL, CALL/prefix, CALL/digit, the marks /P /M /MM /AM
 * /A /QRP and others behind it, and a receiver's mark ("EI7QSB-#", "EI7QSB-1-#"). Any other short
 * part behind the call is kept and means nothing. Never throws.
 */
export function parseCallSign(text: string): CallSign | Refusal {
  const written = text.trim().toUpperCase();
  if (written === '') return { reason: 'The call sign is empty; write one such as EI7QSB.' };
  if (written.length > longest) {
    return { reason: `A call sign has at most ${longest} characters; this one has ${written.length}.` };
  }
  const receiverMark = /(?:-\d{1,2})?(?:-#)?$/.exec(written)?.[0] ?? '';
  const call = written.slice(0, written.length - receiverMark.length);
  const stranger = /[^A-Z0-9/]/u.exec(call)?.[0];
  if (stranger !== undefined) {
    return {
      reason: `The call sign "${written}" holds "${stranger}"; only letters, digits and "/" belong in it.`,
    };
  }
  const pieces = call.split('/');
  if (pieces.includes('')) {
    return { reason: `The call sign "${written}" has a "/" with nothing on one side of it.` };
  }
  const found = findBase(pieces, written);
  if ('reason' in found) return found;
  const { index, parts } = found;
  if (index > 1) {
    return { reason: `The call sign "${written}" has more than one prefix before ${pieces[index]}.` };
  }
  const before = pieces[0] !== undefined && index === 1 ? pieces[0] : null;
  if (before !== null && !isPrefix(before, singleLetter)) {
    return { reason: `In the call sign "${written}", "${before}" is not the prefix of a country.` };
  }
  const after = pieces.slice(index + 1);
  const prefixesBehind = after.filter((piece) => !marks.has(piece) && isPrefix(piece, singleLetterBehind));
  const digitsBehind = after.filter((piece) => /^\d$/.test(piece));
  if ((before === null ? 0 : 1) + prefixesBehind.length + digitsBehind.length > 1) {
    return { reason: `The call sign "${written}" names more than one place.` };
  }
  const locationPrefix = before ?? prefixesBehind[0] ?? null;
  const digitBehind = digitsBehind[0];
  const base = pieces[index]!;
  return {
    call,
    base,
    ...parts,
    before,
    after,
    locationPrefix,
    areaDigit: areaDigitOf(parts, locationPrefix, digitBehind),
    mobile: after.includes('MM') ? 'maritime' : after.includes('AM') ? 'aeronautical' : null,
    away: locationPrefix !== null || digitBehind !== undefined || after.some((piece) => awayMarks.has(piece)),
    // The suffix of a station in another call area says nothing about that area: leave it out.
    location: locationPrefix ?? (digitBehind === undefined ? base : parts.prefix + digitBehind),
    receiverMark: receiverMark === '' ? null : receiverMark,
  };
}

/** Writes a parsed call sign again, the receiver's mark included. */
export function formatCallSign(parsed: CallSign): string {
  const base = parsed.prefix + parsed.digits + parsed.suffix;
  const pieces = parsed.before === null ? [base, ...parsed.after] : [parsed.before, base, ...parsed.after];
  return pieces.join('/') + (parsed.receiverMark ?? '');
}

/**
 * Whether a call can belong to nobody: its suffix is one of QRA to QUZ, the Q-code groups that ITU
 * Radio Regulations keep out of call signs (Article 19, Section III, with ITU-R M.1172). Anything that does not parse is no demo call.
 */
export function isDemoCall(call: string): boolean {
  const parsed = parseCallSign(call);
  return 'suffix' in parsed && /^Q[R-U][A-Z]$/.test(parsed.suffix);
}

/** Splits a piece that has the form of a whole call; null when it has not. */
function splitCall(piece: string): Parts | null {
  const match = /^(3D[A-Z]|[A-PR-Z][A-Z]?|[1-9][A-Z])(\d+)([A-Z0-9]*[A-Z])$/.exec(piece);
  if (match === null) return null;
  const [, prefix, run, suffix] = match as unknown as [string, string, string, string];
  if (prefix.length > 1 || singleLetter.includes(prefix)) return { prefix, digits: run, suffix };
  // A71QRA, S57QRA, C6AQRA: the first digit belongs to the country's prefix.
  return { prefix: prefix + run.slice(0, 1), digits: run.slice(1), suffix };
}

function isPrefix(piece: string, allowedSingle: string): boolean {
  if (piece.length === 1) return allowedSingle.includes(piece);
  if (/^(?:[BFGIKMNRW]\d|(?:[A-PR-Z][A-Z]|[1-9][A-Z]|3D[A-Z])\d?|[A-PR-Z]\d{1,2})$/.test(piece)) return true;
  return isShortCall(piece);
}

/** VP2E, FT5W, VK9X, R1FJ: prefixes of places that look like a whole call with a short suffix. */
function isShortCall(piece: string): boolean {
  const parts = splitCall(piece);
  return parts !== null && parts.suffix.length <= 2;
}

interface Base {
  index: number;
  parts: Parts;
}

function findBase(pieces: readonly string[], written: string): Base | Refusal {
  let best: Base | null = null;
  for (const [index, piece] of pieces.entries()) {
    const parts = splitCall(piece);
    if (parts === null) continue;
    if (best === null) {
      best = { index, parts };
      continue;
    }
    // Of two pieces that could be calls the longer is the operator's; of equals the second, since the
    // custom of licensing agreements writes the visited prefix first.
    const earlier: string = pieces[best.index]!;
    const laterOwns = piece.length >= earlier.length;
    if (!isShortCall(laterOwns ? earlier : piece)) {
      return { reason: `"${written}" holds two whole call signs; send one.` };
    }
    if (laterOwns) best = { index, parts };
  }
  if (best !== null) return best;
  return {
    reason: `"${written}" is not a call sign: it needs a country's prefix, a digit and a suffix that ends in a letter, such as EI7QSB.`,
  };
}

function areaDigitOf(
  parts: Parts,
  locationPrefix: string | null,
  digitBehind: string | undefined,
): number | null {
  if (digitBehind !== undefined) return Number(digitBehind);
  if (locationPrefix === null) return parts.digits.length === 1 ? Number(parts.digits) : null;
  const visited = splitCall(locationPrefix)?.digits ?? locationDigits(locationPrefix);
  return visited.length === 1 ? Number(visited) : null;
}

/** "EA8" -> "8", "T32" -> "2", "T7" -> "", "W4" -> "4". */
function locationDigits(prefix: string): string {
  const first = prefix.slice(0, 1);
  const ownLength = /^3D[A-Z]/.test(prefix) ? 3 : singleLetter.includes(first) && /^.\d/.test(prefix) ? 1 : 2;
  return prefix.slice(ownLength);
}
