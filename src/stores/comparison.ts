import { defineStore } from 'pinia';
import { compare, exportUnits } from '../../shared/contracts/comparison.ts';
import type { ComparisonAnswer, ComparisonQuestion } from '../../shared/contracts/comparison.ts';
import { download, request } from '../api/client.ts';
import { useAnswerWithJob } from './answer-with-job.ts';

/** The comparison that is being asked for and its last answer. */
export const useComparisonStore = defineStore('comparison', () => {
  const asking = useAnswerWithJob<ComparisonQuestion, ComparisonAnswer>((stationId, question, signal) =>
    request(compare, { params: { stationId }, body: question, signal }),
  );

  /** All units behind the answer as a CSV file. @throws ApiProblem */
  function unitsCsv(
    stationId: number,
    question: ComparisonQuestion,
  ): Promise<{ blob: Blob; fileName: string | null }> {
    return download(exportUnits, { params: { stationId }, body: question });
  }

  return { ...asking, unitsCsv };
});
