import { readFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { compare, comparisonAnswer, exportUnits } from '../../shared/contracts/comparison.ts';
import type { ComparisonAnswer } from '../../shared/contracts/comparison.ts';
import { readJob } from '../../shared/contracts/job.ts';
import { markDirty } from '../../server/database/dirty-blocks.ts';
import { makeAllDirtyNights } from '../../worker/units/dirty-nights.ts';
import { createJobRunner } from '../../worker/jobs/job-runner.ts';
import { runUnitsJob } from '../../worker/units/units.job.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { storeSampleStation } from '../helpers/sample-station.ts';
import type { StoredSample } from '../helpers/sample-station.ts';

/** Worked independently in R 4.2.2 (data.table, sandwich); see tests/reference/sample-station/README.md. */
const expected = JSON.parse(
  readFileSync(new URL('../reference/sample-station/expected.json', import.meta.url), 'utf8'),
);

let api: TestApi;
let swap: StoredSample;
let alternate: StoredSample;
let analyst: string;
let contester: string;

beforeAll(async () => {
  api = await startTestApi();
  swap = await storeSampleStation(api.dataSource, 'swap');
  alternate = await storeSampleStation(api.dataSource, 'alternate');
  analyst = (await api.addPerson(swap.stationId, 'analyst')).token;
  contester = (await api.addPerson(swap.stationId, 'contester')).token;
});
afterAll(() => api.close());

async function ask(sample: StoredSample, token: string, a: string, b: string, change: object = {}) {
  return api.call(compare, {
    params: { stationId: sample.stationId },
    token,
    body: { antennaA: sample.antennas[a]!, antennaB: sample.antennas[b]!, ...change },
  });
}
const answerOf = (reply: { body: unknown }): ComparisonAnswer => comparisonAnswer.parse(reply.body);

describe('a comparison over HTTP', () => {
  it('gives the counts and estimates worked in R for swap', async () => {
    const answer = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO'));
    const { all, guardedSpots, matches } = expected.swap;
    expect(answer.counts).toMatchObject({
      units: all.units,
      clusters: all.clusters,
      stations: all.stations,
      nights: all.nights,
      matches,
    });
    expect(answer.estimate!.estimateDb).toBeCloseTo(all.estimate, 6);
    expect(answer.estimate!.interval95Db[0]).toBeCloseTo(all.lo, 6);
    expect(answer.estimate!.interval95Db[1]).toBeCloseTo(all.hi, 6);
    expect(answer.offsets.map((o) => o.bandMetres)).toEqual([40, 80, 160]);
    answer.offsets.forEach((o, k) => expect(o.offsetDb).toBeCloseTo(all.offsets[k], 6));
    // The guarded spots of all three antennas: two questions that share ALPHA count each other antenna once.
    const charlie = answerOf(await ask(swap, analyst, 'ALPHA', 'CHARLIE'));
    const guarded = await api.dataSource.query(
      `SELECT sum((row->>'guarded')::int)::int AS n, sum((row->>'tagged')::int)::int AS tagged
       FROM unit_night, jsonb_array_elements(tally->'spots') AS row WHERE station_id = $1`,
      [swap.stationId],
    );
    expect(guarded[0].n).toBe(guardedSpots);
    expect(guarded[0].tagged + guarded[0].n).toBe(expected.swap.taggedSpots);
    expect(answer.fairness.exclusions.guardedSpots).toBeLessThanOrEqual(guardedSpots);
    expect(charlie.verdict.code).toBe('cannot be separated');
    expect(charlie.verdict.cures.join(' ')).toMatch(
      /Swap the two antennas for about 40 minutes.*same antenna/,
    );
  });

  it('gives the estimates worked in R for alternate, band by band', async () => {
    const token = (await api.addPerson(alternate.stationId, 'manager')).token;
    for (const [band, worked] of Object.entries<(typeof expected)['alternate']['all']>(
      expected.alternate.byBand,
    )) {
      const answer = answerOf(await ask(alternate, token, 'ALPHA', 'BRAVO', { bandsMetres: [Number(band)] }));
      expect(answer.counts).toMatchObject({
        units: worked.units,
        clusters: worked.clusters,
        alternating: worked.units,
      });
      expect(answer.estimate!.estimateDb).toBeCloseTo(worked.estimate, 6);
      expect(answer.estimate!.seDb).toBeCloseTo(worked.se, 6);
      expect(Math.abs(answer.rank!.hodgesLehmannDb - worked.hl)).toBeLessThanOrEqual(0.01);
    }
  });

  it('narrows to nights and hours', async () => {
    const all = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO'));
    const nights = all.nights.map((cell) => cell.night!);
    expect(nights).toHaveLength(4);
    const one = answerOf(
      await ask(swap, analyst, 'ALPHA', 'BRAVO', { fromNight: nights[1], toNight: nights[1] }),
    );
    expect(one.counts.units).toBe(all.nights[1]!.units);
    expect(one.verdict.code).toBe('not enough yet');
    const utc = (from: number, to: number) => ({
      hours: { from: { reference: 'utc', hours: from }, to: { reference: 'utc', hours: to } },
    });
    const evening = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO', utc(18, 22)));
    const night = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO', utc(22, 4)));
    expect(evening.counts.units + night.counts.units).toBe(all.counts.units);
    expect(evening.bandHours.cells.every((cell) => cell.hour! >= 18 && cell.hour! < 22)).toBe(true);
    expect(evening.fairness.exclusions.outsideHoursUnits).toBe(night.counts.units);
  });

  it('names the field when an antenna is not of this station', async () => {
    const reply = await api.call(compare, {
      params: { stationId: swap.stationId },
      token: analyst,
      body: { antennaA: swap.antennas.ALPHA!, antennaB: alternate.antennas.BRAVO! },
    });
    expect(reply.status).toBe(400);
    expect(reply.body).toMatchObject({
      errors: [{ path: 'body.antennaB', message: 'The station has no such antenna.' }],
    });
  });

  it('has units under other rules made by one job, for whoever may ask for them', async () => {
    const rules = { blockMinutes: 30 as const, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 };
    expect((await ask(swap, contester, 'ALPHA', 'BRAVO', { rules })).status).toBe(403);
    const [first, second] = await Promise.all([
      ask(swap, analyst, 'ALPHA', 'BRAVO', { rules }),
      ask(swap, analyst, 'ALPHA', 'BRAVO', { rules }),
    ]);
    expect([first.status, second.status]).toEqual([202, 202]);
    expect(first.body).toEqual(second.body);
    const runner = createJobRunner({
      dataSource: api.dataSource,
      logger: api.deps.logger,
      workerName: 'test',
      concurrency: 1,
      handlers: { units: runUnitsJob },
    });
    const ended = new Promise<void>((resolve) => {
      const stop = api.deps.eventHub.subscribe(swap.stationId, (event) => {
        if (event.type !== 'job') return;
        void api
          .call(readJob, { params: { stationId: swap.stationId, jobId: event.jobId }, token: analyst })
          .then((reply) => {
            if ((reply.body as { state: string }).state !== 'done') return;
            stop();
            resolve();
          });
      });
    });
    runner.start();
    await ended;
    await runner.stop();
    const answer = answerOf(await ask(swap, contester, 'ALPHA', 'BRAVO', { rules }));
    const standing = answerOf(await ask(swap, contester, 'ALPHA', 'BRAVO'));
    // The receivers swap at every quarter hour: half an hour holds the same units by receiver, and each
    // receiver was on both antennas in it.
    expect(answer.counts.matches).toBe(standing.counts.matches);
    expect(answer.counts.simultaneous).toBe(standing.counts.simultaneous);
    expect(standing.counts.alternating).toBe(0);
    expect(answer.counts.alternating).toBeGreaterThan(0);
    expect(answer.preparation.standing).toBe(false);
  });

  it('follows a correction of the switch log, and says so while it waits', async () => {
    const before = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO'));
    const [dwell] = await api.dataSource
      .query(
        `DELETE FROM dwell WHERE station_id = $1 AND receiver_id = $2 AND starts_at = '2026-01-05T18:00:00Z' RETURNING *`,
        [swap.stationId, swap.receivers.EI7QSA],
      )
      .then((result: [Record<string, unknown>[]]) => result[0]);
    await markDirty(api.dataSource.manager, swap.stationId, dwell!.starts_at as Date, dwell!.ends_at as Date);
    const waiting = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO'));
    expect(waiting.preparation.nightsWaiting).toBe(1);
    expect(waiting.counts.units).toBe(before.counts.units);
    await makeAllDirtyNights(api.dataSource, Date.UTC(2026, 5, 1));
    const after = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO'));
    expect(after.preparation.nightsWaiting).toBe(0);
    expect(after.counts.units).toBeLessThan(before.counts.units);
    expect(after.fairness.exclusions.untaggedSpots).toBeGreaterThan(before.fairness.exclusions.untaggedSpots);

    await api.dataSource.query(
      `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source) VALUES ($1, $2, $3, $4, $5, 'hand')`,
      [swap.stationId, swap.receivers.EI7QSA, dwell!.antenna_id, dwell!.starts_at, dwell!.ends_at],
    );
    await markDirty(api.dataSource.manager, swap.stationId, dwell!.starts_at as Date, dwell!.ends_at as Date);
    await makeAllDirtyNights(api.dataSource, Date.UTC(2026, 5, 1));
    const repaired = answerOf(await ask(swap, analyst, 'ALPHA', 'BRAVO'));
    expect(repaired.estimate).toEqual(before.estimate);
    expect(repaired.counts).toEqual(before.counts);
  });

  it('exports the units behind the answer as CSV, one row a unit', async () => {
    const reply = await api.call(exportUnits, {
      params: { stationId: swap.stationId },
      token: contester,
      body: { antennaA: swap.antennas.ALPHA!, antennaB: swap.antennas.BRAVO!, bandsMetres: [160] },
    });
    const lines = reply.text.trim().split('\r\n');
    expect(lines).toHaveLength(expected.swap.byBand['160'].units + 1);
    expect(lines[0]).toContain('difference_db');
    expect(reply.headers.get('content-disposition')).toMatch(/attachment/);
  });
});
