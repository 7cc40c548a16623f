import { estimateComparison } from '../../../shared/comparison/index.ts';
import type {
  ComparedAntenna,
  ComparisonEstimate,
  ComparisonInput,
} from '../../../shared/comparison/index.ts';
import type { TonightAnswer } from '../../../shared/contracts/tonight.ts';

export type BandAdvice = TonightAnswer['bands'][number];

/** An antenna that could be used instead, with the units it shares with the one in use. */
export interface Rival {
  antenna: ComparedAntenna;
  input: Omit<ComparisonInput, 'question' | 'antennas'>;
}

export interface Contest {
  rival: ComparedAntenna;
  result: ComparisonEstimate;
}

/** Each other antenna against the one in use, on one band at this hour. */
export function holdContests(
  bandMetres: number,
  inUse: ComparedAntenna,
  rivals: Rival[],
  question: Pick<ComparisonInput['question'], 'fromNight' | 'toNight' | 'hours'>,
): Contest[] {
  return rivals.map(({ antenna, input }) => ({
    rival: antenna,
    result: estimateComparison({
      ...input,
      antennas: { a: antenna, b: inUse },
      question: {
        antennaA: antenna.id,
        antennaB: inUse.id,
        bandsMetres: [bandMetres],
        ...{
          sectors: [],
          receivers: [],
          kinds: [],
          rules: null,
          marginDb: null,
          zeros: 'drop',
          clustering: 'one-way',
          hourBasis: 'utc',
        },
        ...question,
      },
    }),
  }));
}

/** The rivals with an estimate that may be spoken of, the best first. */
const settled = (contests: Contest[]) =>
  contests
    .filter(({ result }) => result.estimate !== null && !/not enough|separated/.test(result.verdict.code))
    .sort((a, b) => b.result.estimate!.estimateDb - a.result.estimate!.estimateDb);

/**
 * One sentence a band. An antenna is advised only when it is shown to be better than the one in use; the
 * largest estimate alone is no reason to switch (the best of seven guesses always looks good).
 */
export function adviseBand(
  bandMetres: number,
  inUse: ComparedAntenna | null,
  contests: Contest[],
  about: TonightAnswer['about'],
): BandAdvice {
  const when = about === 'this hour' ? 'at this hour' : `in ${about}`;
  const empty = {
    bandMetres,
    inUseAntennaId: inUse?.id ?? null,
    bestAntennaId: null,
    advantageDb: null,
    intervalDb: null,
  };
  if (!inUse) {
    return {
      ...empty,
      sentence: 'No receiver is on an antenna now: log what is on.',
      code: null,
      units: 0,
      nights: 0,
    };
  }
  const known = settled(contests);
  const better = known.find(({ result }) => /^a (clearly )?better$/.test(result.verdict.code));
  const shown = better ?? known[0];
  if (!shown) {
    const most = Math.max(0, ...contests.map(({ result }) => result.counts.units));
    return {
      ...empty,
      sentence: `Not enough yet ${when} to say whether another antenna hears better than ${inUse.name}.`,
      code: 'not enough yet',
      units: most,
      nights: 0,
    };
  }
  const { estimate, verdict, counts } = shown.result;
  const all = known.every(({ result }) => /^b |no practical difference/.test(result.verdict.code));
  return {
    bandMetres,
    inUseAntennaId: inUse.id,
    sentence: better
      ? verdict.sentence
      : all
        ? `Stay on ${inUse.name}: no other antenna is shown to hear better ${when}. ${verdict.sentence}`
        : `Stay on ${inUse.name} for now: nothing better is settled ${when}. ${verdict.sentence}`,
    bestAntennaId: better ? shown.rival.id : inUse.id,
    advantageDb: better ? estimate!.estimateDb : 0,
    intervalDb: better ? estimate!.interval95Db : null,
    code: verdict.code,
    units: counts.units,
    nights: counts.nights,
  };
}
