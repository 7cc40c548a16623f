import { bandsText, questionPhrases } from '../../../shared/contracts/comparison-sentence.ts';
import type { QuestionNames } from '../../../shared/contracts/comparison-sentence.ts';
import { asComparisonDraft } from '../../../shared/contracts/ladder-url.ts';
import type { LadderQuestion } from '../../../shared/contracts/ladder.ts';

/** The parts of the ladder's sentence that can be changed. */
export type LadderBlank = 'band' | 'sectors' | 'hours' | 'nights';

export interface LadderPhrase {
  blank: LadderBlank;
  /** Words in front of the blank: "toward". */
  lead: string;
  text: string;
}

/**
 * The question in the order in which it is said:
 * Rank all antennas on [160 m] toward [every direction] during [the whole night] between [1 and 30 November 2026].
 *
 * @param bandMetres the band that was answered for, which an address without a band leaves to the server
 */
export function ladderPhrases(
  question: LadderQuestion,
  bandMetres: number | null,
  names: QuestionNames,
): LadderPhrase[] {
  const phrases = questionPhrases(asComparisonDraft(question), names);
  const of = (blank: 'sectors' | 'hours' | 'nights'): LadderPhrase => {
    const { lead, text } = phrases.find((phrase) => phrase.blank === blank)!;
    return { blank, lead, text };
  };
  return [
    {
      blank: 'band',
      lead: 'on',
      text: bandMetres === null ? 'the band with the most units' : bandsText([bandMetres]),
    },
    of('sectors'),
    question.hours === null ? { blank: 'hours', lead: 'during', text: 'the whole night' } : of('hours'),
    of('nights'),
  ];
}
