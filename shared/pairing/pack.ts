import { differenceOfMeans, type HeardOnlyColumns, type UnitColumns } from './columns.ts';
import { emptyHeardOnly, emptyUnits } from './rows.ts';

/**
 * Packed rows: all units, or all heard-only rows, of one antenna pair and one night in a Uint8Array.
 *
 * Version 1, little endian, offsets in bytes; n rows, r routes. A route is a combination of band,
 * receivers and kind (or side) that occurs in the pack: there are few, so a row names its route.
 *
 *     0   u32   0x4B505757, the letters "WWPK"
 *     4   u8    version, 1
 *     5   u8    contents, 0 units, 1 heard-only rows
 *     6   u16   block length in minutes
 *     8   u32   n
 *     12  i32   antenna A
 *     16  i32   antenna B
 *     20  i32   first block, minutes since 1970
 *     24  u32   r
 *     28  u32   0
 *     32  i32   r times band, receiver A, receiver B, kind (or side)
 *     then      i32 call[n], i32 sumSnrA[n], i32 sumSnrB[n], u16 route[n], u16 block[n] (blocks after the
 *               first), u16 countA[n], u16 countB[n], u8 speedWpm[n]              (units, 21 bytes a row)
 *     or        i32 call[n], i32 sumSnr[n], u16 route[n], u16 block[n], u16 count[n]  (heard-only, 14)
 *
 * Sums and counts are integers, so a row comes back exactly and differences are divided out again on
 * reading. Wider columns come first: every column is aligned, and is read in place when the pack itself
 * starts at a multiple of 4 bytes (a pack at an odd address is copied once).
 */
const MAGIC = 0x4b505757;
const VERSION = 1;
const HEADER_BYTES = 32;
const ROUTE_FIELDS = 4;
const UNITS = 0;
const HEARD_ONLY = 1;
const CONTENTS_NAMES = ['units', 'heard-only rows'];
const MOST_16_BIT = 65_535;

/** The rows of one antenna pair, ready to be stored. */
export interface PairPack {
  antennaA: number;
  antennaB: number;
  /** Rows in the pack. */
  count: number;
  data: Uint8Array;
}

/**
 * One pack for each antenna pair of `units`, whose rows must be grouped by pair as `pairSpots` gives
 * them. Throws RangeError when a pair comes twice, when blocks are no multiples of `blockMinutes` after
 * the first, or when a pack would span more than 65,535 blocks.
 */
export function packUnits(units: UnitColumns, blockMinutes: number): PairPack[] {
  return packPairs(units, blockMinutes, (from, to) => {
    const own = slice(units, from, to);
    const pack = newPack(UNITS, own, own.kind, blockMinutes);
    const body = unitBody(pack);
    body.call.set(own.call);
    body.sumSnrA.set(own.sumSnrA);
    body.sumSnrB.set(own.sumSnrB);
    body.route.set(pack.routeOfRow);
    body.block.set(pack.blockOfRow);
    body.countA.set(own.countA);
    body.countB.set(own.countB);
    body.speedWpm.set(own.speedWpm);
    return pack.data;
  });
}

/** As `packUnits`, for heard-only rows. */
export function packHeardOnly(heardOnly: HeardOnlyColumns, blockMinutes: number): PairPack[] {
  return packPairs(heardOnly, blockMinutes, (from, to) => {
    const own = slice(heardOnly, from, to);
    const pack = newPack(HEARD_ONLY, own, own.side, blockMinutes);
    const body = heardOnlyBody(pack);
    body.call.set(own.call);
    body.sumSnr.set(own.sumSnr);
    body.route.set(pack.routeOfRow);
    body.block.set(pack.blockOfRow);
    body.count.set(own.count);
    return pack.data;
  });
}

/**
 * The units of any number of packs in one set of columns, in the order of the packs: a season of one
 * pair from its nights. O(rows). Throws RangeError, naming the pack, for bytes that are no unit pack of
 * this version or are cut short.
 */
export function unpackUnits(packs: readonly Uint8Array[]): UnitColumns {
  const headers = packs.map((data, i) => readHeader(data, UNITS, i));
  const units = emptyUnits(totalRows(headers));
  let at = 0;
  for (const header of headers) {
    const body = unitBody(header);
    fillShared(units, units.kind, header, body, at);
    units.countA.set(body.countA, at);
    units.countB.set(body.countB, at);
    units.sumSnrA.set(body.sumSnrA, at);
    units.sumSnrB.set(body.sumSnrB, at);
    units.speedWpm.set(body.speedWpm, at);
    fillDifferences(units.differenceDb, body, at);
    at += header.count;
  }
  return units;
}

/** As `unpackUnits`, for heard-only rows. */
export function unpackHeardOnly(packs: readonly Uint8Array[]): HeardOnlyColumns {
  const headers = packs.map((data, i) => readHeader(data, HEARD_ONLY, i));
  const heardOnly = emptyHeardOnly(totalRows(headers));
  let at = 0;
  for (const header of headers) {
    const body = heardOnlyBody(header);
    fillShared(heardOnly, heardOnly.side, header, body, at);
    heardOnly.count.set(body.count, at);
    heardOnly.sumSnr.set(body.sumSnr, at);
    at += header.count;
  }
  return heardOnly;
}

interface Header {
  data: Uint8Array;
  count: number;
  blockMinutes: number;
  antennaA: number;
  antennaB: number;
  firstBlockMinute: number;
  routes: Int32Array;
}

type SharedColumns = Pick<
  UnitColumns,
  'antennaA' | 'antennaB' | 'call' | 'band' | 'blockMinute' | 'receiverA' | 'receiverB'
>;

function packPairs(
  rows: Pick<SharedColumns, 'antennaA' | 'antennaB'>,
  blockMinutes: number,
  packRows: (from: number, to: number) => Uint8Array,
): PairPack[] {
  if (!Number.isInteger(blockMinutes) || blockMinutes < 1 || blockMinutes > MOST_16_BIT) {
    throw new RangeError(`blockMinutes is ${blockMinutes}; it must be a whole number of minutes.`);
  }
  const { antennaA, antennaB } = rows;
  const packs: PairPack[] = [];
  const seen = new Set<string>();
  let from = 0;
  for (let i = 1; i <= antennaA.length; i++) {
    if (antennaA[i] === antennaA[from] && antennaB[i] === antennaB[from]) continue;
    const pair = `${antennaA[from]} and ${antennaB[from]}`;
    // Packed as two, the second would replace the first where packs are kept by pair.
    if (seen.has(pair)) throw new RangeError(`The rows of antennas ${pair} do not stand together.`);
    seen.add(pair);
    packs.push({
      antennaA: antennaA[from]!,
      antennaB: antennaB[from]!,
      count: i - from,
      data: packRows(from, i),
    });
    from = i;
  }
  return packs;
}

function slice<T extends UnitColumns | HeardOnlyColumns>(columns: T, from: number, to: number): T {
  const entries = Object.entries(columns) as [string, Int32Array][];
  return Object.fromEntries(
    entries.map(([name, values]) => [name, values.subarray(from, to)]),
  ) as unknown as T;
}

/** Writes the header and the routes of the rows (all of one pair) into a new pack with an empty body. */
function newPack(contents: number, rows: SharedColumns, kind: Uint8Array, blockMinutes: number) {
  const count = rows.call.length;
  const routeOfRow = new Uint16Array(count);
  const blockOfRow = new Uint16Array(count);
  const routes: number[] = [];
  const routeNumbers = new Map<string, number>();
  const firstBlockMinute = rows.blockMinute.reduce((first, minute) => Math.min(first, minute));
  for (let i = 0; i < count; i++) {
    const route = [rows.band[i]!, rows.receiverA[i]!, rows.receiverB[i]!, kind[i]!];
    const key = route.join();
    let number = routeNumbers.get(key);
    if (number === undefined) {
      number = routeNumbers.size;
      if (number > MOST_16_BIT) throw new RangeError(`A pack holds at most ${MOST_16_BIT + 1} routes.`);
      routeNumbers.set(key, number);
      routes.push(...route);
    }
    routeOfRow[i] = number;
    const block = (rows.blockMinute[i]! - firstBlockMinute) / blockMinutes;
    if (!Number.isInteger(block) || block > MOST_16_BIT) {
      throw new RangeError(
        `Block ${rows.blockMinute[i]} is not 0 to ${MOST_16_BIT} blocks of ${blockMinutes} min after block ${firstBlockMinute}.`,
      );
    }
    blockOfRow[i] = block;
  }
  const routeCount = routeNumbers.size;
  const data = new Uint8Array(packBytes(contents, count, routeCount));
  const view = new DataView(data.buffer);
  view.setUint32(0, MAGIC, true);
  view.setUint8(4, VERSION);
  view.setUint8(5, contents);
  view.setUint16(6, blockMinutes, true);
  view.setUint32(8, count, true);
  view.setInt32(12, rows.antennaA[0]!, true);
  view.setInt32(16, rows.antennaB[0]!, true);
  view.setInt32(20, firstBlockMinute, true);
  view.setUint32(24, routeCount, true);
  const packedRoutes = new Int32Array(data.buffer, HEADER_BYTES, routes.length);
  packedRoutes.set(routes);
  return { data, count, routes: packedRoutes, routeOfRow, blockOfRow };
}

function packBytes(contents: number, count: number, routeCount: number): number {
  const rowBytes = contents === UNITS ? 21 : 14;
  return HEADER_BYTES + routeCount * ROUTE_FIELDS * 4 + count * rowBytes;
}

function readHeader(given: Uint8Array, contents: number, packNumber: number): Header {
  const refuse = (why: string) => new RangeError(`Pack ${packNumber} ${why}.`);
  if (given.byteLength < HEADER_BYTES) throw refuse('is shorter than a header');
  // Typed arrays can only look at multiples of their width; a copy starts at 0.
  const data = given.byteOffset % 4 === 0 ? given : new Uint8Array(given);
  const view = new DataView(data.buffer, data.byteOffset, data.byteLength);
  if (view.getUint32(0, true) !== MAGIC) throw refuse('is not a pack of units or heard-only rows');
  if (view.getUint8(4) !== VERSION) throw refuse(`has version ${view.getUint8(4)}; ${VERSION} can be read`);
  if (view.getUint8(5) !== contents) throw refuse(`does not hold ${CONTENTS_NAMES[contents]}`);
  const count = view.getUint32(8, true);
  const routeCount = view.getUint32(24, true);
  const bytes = packBytes(contents, count, routeCount);
  if (data.byteLength !== bytes) throw refuse(`has ${data.byteLength} bytes where its header says ${bytes}`);
  return {
    data,
    count,
    blockMinutes: view.getUint16(6, true),
    antennaA: view.getInt32(12, true),
    antennaB: view.getInt32(16, true),
    firstBlockMinute: view.getInt32(20, true),
    routes: new Int32Array(data.buffer, data.byteOffset + HEADER_BYTES, routeCount * ROUTE_FIELDS),
  };
}

function totalRows(headers: readonly Header[]): number {
  return headers.reduce((sum, header) => sum + header.count, 0);
}

type Packed = Pick<Header, 'data' | 'count' | 'routes'>;

/** Hands out the columns of a pack's body, one after another, as views of its bytes. */
function columnReader({ data, count, routes }: Packed) {
  let offset = data.byteOffset + HEADER_BYTES + routes.byteLength;
  const next = (bytes: number) => {
    const start = offset;
    offset += bytes * count;
    return start;
  };
  return {
    int32: () => new Int32Array(data.buffer, next(4), count),
    uint16: () => new Uint16Array(data.buffer, next(2), count),
    uint8: () => new Uint8Array(data.buffer, next(1), count),
  };
}

function unitBody(pack: Packed) {
  const columns = columnReader(pack);
  return {
    call: columns.int32(),
    sumSnrA: columns.int32(),
    sumSnrB: columns.int32(),
    route: columns.uint16(),
    block: columns.uint16(),
    countA: columns.uint16(),
    countB: columns.uint16(),
    speedWpm: columns.uint8(),
  };
}

function heardOnlyBody(pack: Packed) {
  const columns = columnReader(pack);
  return {
    call: columns.int32(),
    sumSnr: columns.int32(),
    route: columns.uint16(),
    block: columns.uint16(),
    count: columns.uint16(),
  };
}

function fillDifferences(differenceDb: Float64Array, body: ReturnType<typeof unitBody>, at: number): void {
  const { sumSnrA, countA, sumSnrB, countB } = body;
  for (let i = 0; i < sumSnrA.length; i++) {
    differenceDb[at + i] = differenceOfMeans(sumSnrA[i]!, countA[i]!, sumSnrB[i]!, countB[i]!);
  }
}

/** Fills what units and heard-only rows have in common, from row `at` on. */
function fillShared(
  target: SharedColumns,
  kind: Uint8Array,
  header: Header,
  body: { call: Int32Array; route: Uint16Array; block: Uint16Array },
  at: number,
): void {
  const { count, routes, blockMinutes, firstBlockMinute } = header;
  const { route, block } = body;
  const { band, receiverA, receiverB, blockMinute } = target;
  target.antennaA.fill(header.antennaA, at, at + count);
  target.antennaB.fill(header.antennaB, at, at + count);
  target.call.set(body.call, at);
  for (let i = 0; i < count; i++) {
    const entry = route[i]! * ROUTE_FIELDS;
    band[at + i] = routes[entry]!;
    receiverA[at + i] = routes[entry + 1]!;
    receiverB[at + i] = routes[entry + 2]!;
    kind[at + i] = routes[entry + 3]!;
    blockMinute[at + i] = firstBlockMinute + block[i]! * blockMinutes;
  }
}
