import { defineStore } from 'pinia';
import { rankAntennas } from '../../shared/contracts/ladder.ts';
import type { LadderAnswer, LadderQuestion } from '../../shared/contracts/ladder.ts';
import { request } from '../api/client.ts';
import { useAnswerWithJob } from './answer-with-job.ts';

/** The ladder that is being asked for and its last answer. */
export const useLadderStore = defineStore('ladder', () =>
  useAnswerWithJob<LadderQuestion, LadderAnswer>((stationId, question, signal) =>
    request(rankAntennas, { params: { stationId }, body: question, signal }),
  ),
);
