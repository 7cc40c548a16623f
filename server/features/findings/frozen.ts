import type { z } from 'zod';
import { answerComparison } from '../../../shared/comparison/index.ts';
import type { ComparisonAnswer } from '../../../shared/contracts/comparison.ts';
import { questionSentence } from '../../../shared/contracts/comparison-sentence.ts';
import type { finding } from '../../../shared/contracts/finding.ts';
import { canonical } from './evidence.ts';
import type { Evidence } from './evidence.ts';
import { packEvidence } from './evidence-codec.ts';
import { digestOf, heardOnlyCount } from './digest.ts';
import { drawPictures } from './pictures.ts';
import type { FrozenPictures } from './pictures.ts';

type Reply = z.input<typeof finding>;

/** What is stored of an answer, worked out from its evidence alone. */
export interface Frozen {
  answer: ComparisonAnswer;
  sentence: string;
  digest: string;
  nightDigests: Reply['nightDigests'];
  pictures: FrozenPictures;
  packed: Uint8Array;
}

export interface FreezeInput {
  evidence: Evidence;
  preparation: ComparisonAnswer['preparation'];
}

/** Pure: the same evidence gives the same record. */
export function freezeAnswer({ evidence, preparation }: FreezeInput): Frozen {
  const input = canonical(evidence.input);
  const answer = { ...answerComparison(input), preparation };
  const { digest, nights } = digestOf(input);
  return {
    answer,
    sentence: questionSentence(input.question, {
      antenna: (id) => (id === input.antennas.a.id ? input.antennas.a.name : input.antennas.b.name),
      receiver: (id) => input.receivers.find((r) => r.id === id)?.callSign ?? `receiver ${id}`,
      sectorCount: input.sectorCount,
    }),
    digest,
    nightDigests: nights.map((night) => ({
      night: night.night,
      units: night.units.size,
      heardOnly: heardOnlyCount(night),
      digest: night.digest,
    })),
    pictures: drawPictures(answer),
    packed: packEvidence({ ...evidence, input }),
  };
}
