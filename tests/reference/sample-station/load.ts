import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { parse } from 'csv-parse/sync';
import type { DwellColumns, SpotColumns } from '../../../shared/pairing/index.ts';
import { bandOfKhz } from '../../../shared/radio/bands.ts';

/** One of the two invented data sets as columns, with the names behind the ids. */
export interface SampleStation {
  spots: SpotColumns;
  dwells: DwellColumns;
  antennaIds: Map<string, number>;
  receiverIds: Map<string, number>;
  /** Call signs in the order of their ids, the first of which is 1. */
  calls: string[];
}

function readRows(name: string): Record<string, string>[] {
  const file = fileURLToPath(new URL(name, import.meta.url));
  return parse(readFileSync(file), { columns: true }) as Record<string, string>[];
}

/** Gives each distinct text an id from 1 in alphabetical order. */
function idsOf(texts: string[]): Map<string, number> {
  return new Map([...new Set(texts)].sort().map((text, i) => [text, i + 1]));
}

export function loadSampleStation(set: 'swap' | 'alternate'): SampleStation {
  const dwellRows = readRows(`${set}-dwells.csv`);
  const spotRows = readRows(`${set}-spots.csv`);
  const antennaIds = idsOf(dwellRows.map((row) => row.antenna!));
  const receiverIds = idsOf(dwellRows.map((row) => row.rx!));
  const callIds = idsOf(spotRows.map((row) => row.call!));
  return {
    antennaIds,
    receiverIds,
    calls: [...callIds.keys()],
    dwells: {
      receiver: Int32Array.from(dwellRows, (row) => receiverIds.get(row.rx!)!),
      antenna: Int32Array.from(dwellRows, (row) => antennaIds.get(row.antenna!)!),
      startMs: Float64Array.from(dwellRows, (row) => Date.parse(row.starts_at!)),
      endMs: Float64Array.from(dwellRows, (row) => Date.parse(row.ends_at!)),
    },
    spots: {
      timeMs: Float64Array.from(spotRows, (row) => Date.parse(row.utc!)),
      receiver: Int32Array.from(spotRows, (row) => receiverIds.get(row.rx!)!),
      call: Int32Array.from(spotRows, (row) => callIds.get(row.call!)!),
      band: Int16Array.from(spotRows, (row) => bandOfKhz(Number(row.khz))!),
      freq100Hz: Int32Array.from(spotRows, (row) => Math.round(Number(row.khz) * 10)),
      snrDb: Int16Array.from(spotRows, (row) => Number(row.snr_db)),
      uncertaintySeconds: new Uint8Array(spotRows.length),
      speedWpm: Uint8Array.from(spotRows, (row) => Number(row.wpm)),
    },
  };
}
