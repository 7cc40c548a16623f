import type { TagTally } from './columns.ts';
import type { DwellIndex } from './dwell-index.ts';

/** Counts spots by tag. Bands are few, so each band gets its own counters when it is first met. */
export interface TagTallies {
  addTagged(side: number, band: number): void;
  addGuarded(side: number, band: number): void;
  addUntagged(receiver: number, band: number): void;
  /** Ascending by receiver, antenna and band. */
  rows(): TagTally[];
}

interface BandCounters {
  tagged: Float64Array;
  guarded: Float64Array;
  untaggedByReceiver: Map<number, number>;
}

export function tagTallies(sides: DwellIndex['sides']): TagTallies {
  const sideCount = sides.receiver.length;
  const bands = new Map<number, BandCounters>();
  // Spots come grouped by band: the last band is nearly always the next one.
  let lastBand = Number.NaN;
  let last: BandCounters | undefined;

  function countersOf(band: number): BandCounters {
    if (last && band === lastBand) return last;
    const counters = bands.get(band) ?? {
      tagged: new Float64Array(sideCount),
      guarded: new Float64Array(sideCount),
      untaggedByReceiver: new Map<number, number>(),
    };
    bands.set(band, counters);
    lastBand = band;
    last = counters;
    return counters;
  }

  return {
    addTagged(side, band) {
      countersOf(band).tagged[side]!++;
    },
    addGuarded(side, band) {
      countersOf(band).guarded[side]!++;
    },
    addUntagged(receiver, band) {
      const { untaggedByReceiver } = countersOf(band);
      untaggedByReceiver.set(receiver, (untaggedByReceiver.get(receiver) ?? 0) + 1);
    },
    rows() {
      const rows: TagTally[] = [];
      for (const [band, counters] of bands) {
        for (const [receiver, untagged] of counters.untaggedByReceiver) {
          rows.push({ receiver, antenna: 0, band, tagged: 0, guarded: 0, untagged });
        }
        for (let side = 0; side < sideCount; side++) {
          const [tagged, guarded] = [counters.tagged[side]!, counters.guarded[side]!];
          if (tagged + guarded === 0) continue;
          const [receiver, antenna] = [sides.receiver[side]!, sides.antenna[side]!];
          rows.push({ receiver, antenna, band, tagged, guarded, untagged: 0 });
        }
      }
      return rows.sort((p, q) => p.receiver - q.receiver || p.antenna - q.antenna || p.band - q.band);
    },
  };
}
