/**
 * The numbers and terms that the Methods page explains: anchor of the entry -> how the sentence "How ..." goes on,
 * which is the accessible name of every link to it. A new key needs an entry; a test walks them all.
 */
export const methodTerms = {
  spot: 'a spot gets its antenna',
  dwell: 'a dwell is made',
  guard: 'the guard works',
  block: 'blocks are cut',
  unit: 'a unit is made',
  'heard-only': 'heard-only stations are counted',
  night: 'nights are counted',
  'station-night': 'station-nights are counted',
  bearing: 'a bearing is worked out, and when it is unsure',
  hours: 'hours, sunset and darkness are worked out',
  estimate: 'the difference is estimated',
  interval: 'the 95 % interval is computed',
  'receiver-offsets': 'receiver offsets are taken out',
  separability: 'it is found that antennas cannot be separated',
  'design-effect': 'the design effect is computed',
  'two-way': 'two-way clustering works',
  p: 'p, the chance of such a difference by luck, is computed',
  verdict: 'the margin and the interval make the verdict',
  equivalence: 'practical equivalence is tested',
  'signed-rank': 'the rank test is computed',
  'hodges-lehmann': 'the typical difference by ranks is computed',
  'paired-t': 'the paired t test is computed',
  'effect-size': 'the difference is held against its spread',
  'chance-better': 'the chance that one antenna hears a station better is computed',
  'sign-test': 'the sign test is computed',
  'odds-ratio': 'the heard-only odds ratio is computed',
  censored: 'stations heard on one antenna only enter the estimate',
  'peek-proof': 'the peek-proof interval is computed',
  'half-weight': 'the weight of single stations is counted',
  histogram: 'the differences are put into bars',
  'map-cells': 'a cell of a picture is estimated, and when it is hatched',
  'adjusted-p': 'p is adjusted across many cells',
  pooling: 'cells are pooled',
  planning: 'the nights still needed are computed',
  detectable: 'the detectable difference is computed',
  sensitivity: 'the answer is tried under other choices',
  ladder: 'antennas are put on one ladder',
  'chance-best': 'the chance of being best is computed',
  'direct-indirect': 'direct and indirect evidence are compared',
  components: 'it is found which antennas nothing links',
  finding: 'a finding is frozen',
  digest: 'the digest of a finding is made',
} as const;

export type MethodId = keyof typeof methodTerms;

export const methodIds = Object.keys(methodTerms) as MethodId[];

export function isMethodId(text: string): text is MethodId {
  return Object.hasOwn(methodTerms, text);
}
