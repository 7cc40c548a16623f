import { comparisonQuestion, type ComparisonQuestionInput } from '../../shared/contracts/comparison.ts';
import { nightDate, nightIndexOfDate } from '../../shared/radio/night.ts';
import type { Trial } from '../../server/database/entities/trial.ts';

type Draft = Pick<Trial, 'name' | 'question' | 'notes'>;

/** The questions that the demo's analyst has kept: each shows another side of the program. */
export function demoTrials(antennas: Readonly<Record<string, number>>, firstNight: string): Draft[] {
  const trial = (
    name: string,
    antennaA: string,
    antennaB: string,
    more: Omit<ComparisonQuestionInput, 'antennaA' | 'antennaB'>,
    notes: string,
  ): Draft => ({
    name,
    notes,
    question: comparisonQuestion.parse({
      antennaA: antennas[antennaA],
      antennaB: antennas[antennaB],
      ...more,
    }),
  });
  return [
    trial(
      'North-east wire or vertical, Europe and Asia',
      'North-east wire',
      'Vertical',
      { bandsMetres: [160, 80], sectors: [1, 2], hourBasis: 'sunset' },
      'The wire points to 55 degrees. Is it worth the walk to the stream after every storm?',
    ),
    trial(
      'West wire toward North America after midnight',
      'West wire',
      'Vertical',
      {
        bandsMetres: [160, 80, 40],
        sectors: [9, 10],
        hours: { from: { reference: 'utc', hours: 0 }, to: { reference: 'sunrise', hours: 1 } },
      },
      'For the contest: which one to leave on the main receiver once Europe has gone to bed.',
    ),
    trial(
      'Is the western loop worse than its twin',
      'Small loop south',
      'Small loop west',
      { bandsMetres: [160, 80] },
      'Same wire, same size. The western one stands near the barn.',
    ),
    trial(
      'New phased pair or North-east wire',
      'Phased pair',
      'North-east wire',
      { bandsMetres: [80, 40], fromNight: nightDate(nightIndexOfDate(firstNight) + 6) },
      'If the pair is as good to the east, the wire can come down before lambing.',
    ),
    trial(
      'Can the ground wire come up',
      'Ground wire',
      'Vertical',
      {},
      'Taken up when the field was let. Kept here to show why nobody missed it.',
    ),
  ];
}
