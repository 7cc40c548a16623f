import type { ComparisonInput } from './input.ts';
import { BlockCalendar, sectorLookup } from './selection.ts';

export interface SelectedHeardOnly {
  n: number;
  call: Int32Array;
  band: Int16Array;
  night: Int32Array;
  /** 1: heard on A only, -1: on B only. */
  side: Int8Array;
  /** The receiver that heard and the one that listened in vain, on A's and on B's side. */
  receiverA: Int32Array;
  receiverB: Int32Array;
  /** Mean SNR on the side that heard, dB. */
  heardDb: Float64Array;
  sector: Int16Array;
}

/** As `selectUnits`, for stations heard on one of the two antennas only. */
export function selectHeardOnly(input: ComparisonInput): SelectedHeardOnly {
  const { question, heardOnly } = input;
  const bands = new Set(question.bandsMetres);
  const receivers = new Set(question.receivers);
  const sectors = new Set(question.sectors);
  const calendar = new BlockCalendar(input);
  const sectorOfCall = sectorLookup(input);
  const sign = question.antennaA < question.antennaB ? 1 : -1;
  const most = heardOnly.call.length;
  const out: Omit<SelectedHeardOnly, 'n'> = {
    call: new Int32Array(most),
    band: new Int16Array(most),
    night: new Int32Array(most),
    side: new Int8Array(most),
    receiverA: new Int32Array(most),
    receiverB: new Int32Array(most),
    heardDb: new Float64Array(most),
    sector: new Int16Array(most),
  };
  let n = 0;
  for (let i = 0; i < most; i++) {
    if (bands.size > 0 && !bands.has(heardOnly.band[i]!)) continue;
    const block = calendar.at(heardOnly.blockMinute[i]!);
    if (!block.inHours) continue;
    const [a, b] = [heardOnly.receiverA[i]!, heardOnly.receiverB[i]!];
    if (receivers.size > 0 && !(receivers.has(a) && receivers.has(b))) continue;
    if (question.kinds.length === 1 && (question.kinds[0] === 'alternating') !== (a === b)) continue;
    const sector = sectorOfCall(heardOnly.call[i]!);
    if (sectors.size > 0 && !sectors.has(sector)) continue;
    out.call[n] = heardOnly.call[i]!;
    out.band[n] = heardOnly.band[i]!;
    out.night[n] = block.night;
    out.side[n] = heardOnly.side[i] === 0 ? sign : -sign;
    out.receiverA[n] = sign > 0 ? a : b;
    out.receiverB[n] = sign > 0 ? b : a;
    out.heardDb[n] = heardOnly.sumSnr[i]! / heardOnly.count[i]!;
    out.sector[n] = sector;
    n++;
  }
  return {
    n,
    call: out.call.subarray(0, n),
    band: out.band.subarray(0, n),
    night: out.night.subarray(0, n),
    side: out.side.subarray(0, n),
    receiverA: out.receiverA.subarray(0, n),
    receiverB: out.receiverB.subarray(0, n),
    heardDb: out.heardDb.subarray(0, n),
    sector: out.sector.subarray(0, n),
  };
}
