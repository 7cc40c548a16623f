import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { compare, sensitivity } from '../../shared/contracts/comparison.ts';
import type { ComparisonAnswer, SensitivityVariant } from '../../shared/contracts/comparison.ts';
import { readJob } from '../../shared/contracts/job.ts';
import { createJobRunner } from '../../worker/jobs/job-runner.ts';
import { runUnitsJob } from '../../worker/units/units.job.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { storeSampleStation } from '../helpers/sample-station.ts';
import type { StoredSample } from '../helpers/sample-station.ts';

let api: TestApi;
let sample: StoredSample;
let analyst: string;
let contester: string;

beforeAll(async () => {
  api = await startTestApi();
  sample = await storeSampleStation(api.dataSource, 'swap');
  analyst = (await api.addPerson(sample.stationId, 'analyst')).token;
  contester = (await api.addPerson(sample.stationId, 'contester')).token;
});
afterAll(() => api.close());

const question = (change: object = {}) => ({
  antennaA: sample.antennas.ALPHA!,
  antennaB: sample.antennas.BRAVO!,
  ...change,
});

interface Reply {
  marginDb: number;
  variants: SensitivityVariant[];
  sentence: string | null;
}

async function ask(token: string, prepare: boolean): Promise<Reply> {
  const reply = await api.call(sensitivity, {
    params: { stationId: sample.stationId },
    token,
    body: { question: question(), prepare },
  });
  expect(reply.status).toBe(200);
  return reply.body as Reply;
}

const jobs = (reply: Reply) => reply.variants.flatMap(({ jobId }) => (jobId === null ? [] : [jobId]));

/** Runs the queue until these jobs are done, told by their own events. */
async function finish(jobIds: number[]): Promise<void> {
  const left = new Set(jobIds);
  const runner = createJobRunner({
    dataSource: api.dataSource,
    logger: api.deps.logger,
    workerName: 'test',
    concurrency: 1,
    handlers: { units: runUnitsJob },
  });
  const ended = new Promise<void>((resolve) => {
    const stop = api.deps.eventHub.subscribe(sample.stationId, (event) => {
      if (event.type !== 'job' || !left.has(event.jobId)) return;
      void api
        .call(readJob, { params: { stationId: sample.stationId, jobId: event.jobId }, token: analyst })
        .then((reply) => {
          if ((reply.body as { state: string }).state !== 'done') return;
          left.delete(event.jobId);
          if (left.size > 0) return;
          stop();
          resolve();
        });
    });
  });
  runner.start();
  await ended;
  await runner.stop();
}

describe('a question under other choices', () => {
  it('answers what the units at hand can say and makes no others for who only looks', async () => {
    const reply = await ask(contester, true);
    const states = new Map(reply.variants.map(({ group, state }) => [group, state]));
    expect(Object.fromEntries(states)).toEqual({
      'as asked': 'ready',
      zeros: 'ready',
      clustering: 'ready',
      stations: 'ready',
      weights: 'ready',
      'block length': 'not made',
      'matching window': 'not made',
      guard: 'not made',
    });
    expect(jobs(reply)).toEqual([]);
    expect(reply.sentence).toBeNull();
  });

  it('has the units of every other rule made once, and then says what all choices say together', async () => {
    const [first, second] = await Promise.all([ask(analyst, true), ask(analyst, true)]);
    // Three other block lengths, two other windows, two other guards: a job each, shared by both who ask.
    expect(jobs(first)).toHaveLength(7);
    expect(jobs(second)).toEqual(jobs(first));
    expect(jobs(await ask(contester, false))).toEqual(jobs(first));
    await finish(jobs(first));

    const reply = await ask(contester, false);
    expect(reply.variants.map(({ state }) => state)).toEqual(reply.variants.map(() => 'ready'));
    expect(reply.sentence).toMatch(/under all 13 choices/);

    // Each is the answer to the question asked under that rule.
    const rules = { blockMinutes: 30, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 };
    const asked = await api.call(compare, {
      params: { stationId: sample.stationId },
      token: contester,
      body: question({ rules }) as never,
    });
    const answer = asked.body as ComparisonAnswer;
    expect(reply.variants.find(({ key }) => key === 'block-30')).toMatchObject({
      units: answer.counts.units,
      estimateDb: answer.estimate!.estimateDb,
      intervalDb: answer.estimate!.interval95Db,
      verdict: answer.verdict.code,
    });
    // A longer guard leaves fewer spots to match.
    const unitsOf = (key: string) => reply.variants.find((variant) => variant.key === key)!.units;
    expect(unitsOf('guard-40')).toBeLessThan(unitsOf('guard-10'));
    expect(unitsOf('without-heaviest')).toBeLessThan(unitsOf('as-asked'));
    expect(unitsOf('equal-stations')).toBe(unitsOf('as-asked'));
  });
});
