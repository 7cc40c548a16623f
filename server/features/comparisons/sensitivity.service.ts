import type { z } from 'zod';
import { ruleVariants, sensitivitySentence, type VariantAnswer } from '../../../shared/comparison/index.ts';
import type {
  ComparisonQuestion,
  SensitivityVariant,
  sensitivity,
} from '../../../shared/contracts/comparison.ts';
import { may } from '../../../shared/contracts/permission.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict } from '../../platform/errors.ts';
import type { Actor } from '../../platform/route.ts';
import { readStation } from '../station/station.read-model.ts';
import { prepareUnits, unitsState } from '../units/prepare-units.ts';
import { createComparisonService } from './comparison.service.ts';

type Sensitivity = z.input<(typeof sensitivity)['reply']>;

const nothingYet = { estimateDb: null, intervalDb: null, units: 0, clusters: 0, verdict: null };

/** One question under other choices. Those that need units of their own wait for them, or say that they are not made. */
export function createSensitivityService(deps: Deps) {
  const comparisons = createComparisonService(deps);

  return async (
    stationId: number,
    question: ComparisonQuestion,
    prepare: boolean,
    actor: Actor,
    signal?: AbortSignal,
  ): Promise<Sensitivity> => {
    const base = await comparisons.prepare(stationId, question, actor);
    if ('pending' in base) {
      throw new Conflict(
        'The units under these rules are being made. Try again when the answer shows.',
        [],
        'units-pending',
      );
    }
    const station = await readStation(deps.dataSource.manager, stationId);
    const mayMake = actor.role !== null && may(actor.role, 'comparison:prepare');
    const variants: SensitivityVariant[] = (await deps.heavyWork.run('unitVariants', base.input, signal)).map(
      ready,
    );

    for (const { rules, ...name } of ruleVariants(base.input.rules)) {
      signal?.throwIfAborted();
      const wanted = { station, rules, nights: question, actor, nowMs: deps.now() };
      const state = await unitsState(deps.dataSource, wanted);
      if (!state.ready) {
        const jobId = prepare && mayMake ? await prepareUnits(deps.dataSource, wanted) : state.jobId;
        variants.push({ ...name, ...nothingYet, state: jobId === null ? 'not made' : 'waiting', jobId });
        continue;
      }
      const prepared = await comparisons.prepare(stationId, { ...question, rules }, actor);
      if ('pending' in prepared) {
        variants.push({ ...name, ...nothingYet, state: 'waiting', jobId: prepared.jobId });
        continue;
      }
      variants.push(ready(await deps.heavyWork.run('ruleVariant', { name, input: prepared.input }, signal)));
    }
    const complete = variants.every(({ state }) => state === 'ready');
    return {
      marginDb: base.input.marginDb,
      variants,
      sentence: complete ? sensitivitySentence(variants, base.input.marginDb) : null,
    };
  };
}

function ready(answer: VariantAnswer): SensitivityVariant {
  return { ...answer, state: 'ready', jobId: null };
}
