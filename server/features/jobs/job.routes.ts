import * as contract from '../../../shared/contracts/job.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { Conflict, NotFound } from '../../platform/errors.ts';
import { wakeWorkers } from '../../platform/notify.ts';
import { inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';
import { listJobs, readJob } from './job.read-model.ts';
import { jobRepository } from './job.repository.ts';

export function jobRoutes(deps: Deps): Route[] {
  const { dataSource } = deps;
  const found = async (stationId: number, jobId: number) => {
    const job = await readJob(dataSource.manager, stationId, jobId);
    if (!job) throw new NotFound('This job');
    return job;
  };

  return [
    route(contract.listJobs, { access: inStation('job:read') }, async ({ params }) => ({
      items: await listJobs(dataSource.manager, params.stationId),
    })),
    route(contract.readJob, { access: inStation('job:read') }, async ({ params }) =>
      found(params.stationId, params.jobId),
    ),
    route(
      contract.cancelJob,
      { access: inStation('job:cancel'), audit: 'job.cancel' },
      async ({ params, audit }) => {
        await found(params.stationId, params.jobId);
        await inTransaction(dataSource, async (manager) => {
          const cancelled = await jobRepository.cancel(manager, params.stationId, params.jobId);
          if (!cancelled) throw new Conflict('This job has ended already.');
          await audit(manager, String(params.jobId));
        });
        return found(params.stationId, params.jobId);
      },
    ),
    route(
      contract.retryJob,
      { access: inStation('job:cancel'), audit: 'job.retry' },
      async ({ params, audit }) => {
        await found(params.stationId, params.jobId);
        await inTransaction(dataSource, async (manager) => {
          const retried = await jobRepository.retry(manager, params.stationId, params.jobId);
          if (!retried) throw new Conflict('Only a job that failed for good can be tried again.');
          await audit(manager, String(params.jobId));
          await wakeWorkers(manager);
        });
        return found(params.stationId, params.jobId);
      },
    ),
  ];
}
