import type { SensitivityVariant } from '../contracts/comparison.ts';

/** An invented reply about other choices, for tests: ready, being made, and not made. */
export function fixtureSensitivity(): {
  marginDb: number;
  variants: SensitivityVariant[];
  sentence: string | null;
} {
  return {
    marginDb: 1,
    variants: [
      variant('as-asked', 'as asked', 'As asked', 1.8, 0.7, 'a clearly better'),
      variant('zeros-drop', 'zeros', 'Ranks, zeros dropped', 1.7, 0.6, null),
      variant('zeros-pratt', 'zeros', 'Ranks, zeros kept', 1.7, 0.6, null),
      variant('clusters-two-way', 'clustering', 'Stations and nights (two-way)', 1.8, 1.1, 'a better'),
      variant(
        'without-heaviest',
        'stations',
        'Without the 5 stations with most units',
        0.4,
        1.3,
        'not settled',
      ),
      variant('equal-stations', 'weights', 'Every station counts the same', -0.6, 0.8, 'not enough yet'),
      { ...unmade('block-5', 'block length', 'Blocks of 5\u2009min'), state: 'waiting', jobId: 41 },
      variant('block-30', 'block length', 'Blocks of 30\u2009min', 1.9, 0.8, 'a clearly better'),
      { ...unmade('window-15', 'matching window', 'Window of 15\u2009s'), state: 'waiting', jobId: 42 },
      unmade('guard-10', 'guard', 'Guard of 10\u2009s'),
    ],
    sentence: null,
  };
}

function variant(
  key: string,
  group: SensitivityVariant['group'],
  label: string,
  estimateDb: number,
  halfWidthDb: number,
  verdict: SensitivityVariant['verdict'],
): SensitivityVariant {
  return {
    ...{ key, group, label, estimateDb, verdict, state: 'ready', jobId: null, units: 412, clusters: 212 },
    intervalDb: [estimateDb - halfWidthDb, estimateDb + halfWidthDb],
  };
}

function unmade(key: string, group: SensitivityVariant['group'], label: string): SensitivityVariant {
  return {
    ...{ key, group, label, state: 'not made', jobId: null, units: 0, clusters: 0 },
    ...{ estimateDb: null, intervalDb: null, verdict: null },
  };
}
