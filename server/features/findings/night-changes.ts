import type { Recomputation } from '../../../shared/contracts/finding.ts';
import { heardOnlyCount } from './digest.ts';
import type { NightLines } from './digest.ts';
import { compareText } from './evidence.ts';

export type NightChange = Recomputation['nights'][number];

const nothing: Omit<NightLines, 'night'> = {
  units: new Map(),
  heardOnly: new Map(),
  common: new Map(),
  digest: '',
};

/** Nights whose lines differ, in order, with how many units came, went and changed. */
export function nightChanges(then: readonly NightLines[], now: readonly NightLines[]): NightChange[] {
  const before = new Map(then.map((night) => [night.night, night]));
  const after = new Map(now.map((night) => [night.night, night]));
  return [...new Set([...before.keys(), ...after.keys()])].sort(compareText).flatMap((night) => {
    const old = before.get(night) ?? nothing;
    const fresh = after.get(night) ?? nothing;
    if (old.digest === fresh.digest) return [];
    let removed = 0;
    let changed = 0;
    for (const [key, values] of old.units) {
      const found = fresh.units.get(key);
      if (found === undefined) removed++;
      else if (found !== values) changed++;
    }
    const unitsThen = old.units.size;
    const unitsNow = fresh.units.size;
    return [
      {
        night,
        unitsThen,
        unitsNow,
        added: unitsNow - (unitsThen - removed),
        removed,
        changed,
        heardOnlyThen: heardOnlyCount({ night, ...old }),
        heardOnlyNow: heardOnlyCount({ night, ...fresh }),
      },
    ];
  });
}
