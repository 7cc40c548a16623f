import * as contract from '../../../shared/contracts/comparison.ts';
import { inTransaction, isUniqueViolation } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, InvalidRequest, NotFound } from '../../platform/errors.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { unknownIds } from '../comparisons/question-ids.read-model.ts';
import { listTrials } from './trial.read-model.ts';
import { trialRepository } from './trial.repository.ts';

export function trialRoutes(deps: Deps): Route[] {
  const { dataSource } = deps;
  const write = inStation('trial:write');

  async function uniquelyNamed<T>(work: () => Promise<T>): Promise<T> {
    try {
      return await work();
    } catch (error) {
      if (!isUniqueViolation(error)) throw error;
      throw new Conflict('Some fields have to change.', [
        { path: 'body.name', message: 'The station has a trial with this name already.' },
      ]);
    }
  }

  async function found(stationId: number, id: number) {
    const [trial] = await listTrials(dataSource.manager, stationId, id);
    if (!trial) throw new NotFound('This trial');
    return trial;
  }

  async function checkQuestion(stationId: number, question: contract.ComparisonQuestion | undefined) {
    if (!question) return;
    const unknown = await unknownIds(dataSource.manager, stationId, question, 'body.question');
    if (unknown.length > 0) throw new InvalidRequest('Some fields have to change.', unknown);
  }

  return [
    route(contract.listTrials, { access: inStation('trial:read') }, async ({ params }) => ({
      items: await listTrials(dataSource.manager, params.stationId),
    })),
    route(contract.readTrial, { access: inStation('trial:read') }, async ({ params }) =>
      found(params.stationId, params.trialId),
    ),
    route(
      contract.saveTrial,
      { access: write, audit: 'trial.save' },
      async ({ params, body, actor, audit }) => {
        await checkQuestion(params.stationId, body.question);
        const id = await uniquelyNamed(() =>
          inTransaction(dataSource, async (manager) => {
            const trial = await trialRepository.add(manager, {
              stationId: params.stationId,
              name: body.name,
              question: body.question,
              notes: body.notes,
              createdBy: actor.userId,
            });
            await audit(manager, String(trial.id), { name: body.name });
            return trial.id;
          }),
        );
        return found(params.stationId, id);
      },
    ),
    route(contract.updateTrial, { access: write, audit: 'trial.update' }, async ({ params, body, audit }) => {
      await checkQuestion(params.stationId, body.question);
      await uniquelyNamed(() =>
        inTransaction(dataSource, async (manager) => {
          const done = await trialRepository.update(manager, params.stationId, params.trialId, body);
          if (!done) throw new NotFound('This trial');
          await audit(manager, String(params.trialId), { fields: Object.keys(body) });
        }),
      );
      return found(params.stationId, params.trialId);
    }),
    route(contract.archiveTrial, { access: write, audit: 'trial.archive' }, async ({ params, audit }) =>
      inTransaction(dataSource, async (manager) => {
        const done = await trialRepository.update(manager, params.stationId, params.trialId, {
          archivedAt: new Date(),
        });
        if (!done) throw new NotFound('This trial');
        await audit(manager, String(params.trialId));
      }),
    ),
  ];
}
