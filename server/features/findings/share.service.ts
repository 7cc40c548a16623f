import type { EntityManager } from 'typeorm';
import type { z } from 'zod';
import type { BodyOf } from '../../../shared/contracts/endpoint.ts';
import type * as contract from '../../../shared/contracts/finding.ts';
import { inTransaction } from '../../database/transaction.ts';
import type { Deps } from '../../platform/deps.ts';
import { AppError, NotFound } from '../../platform/errors.ts';
import type { Actor } from '../../platform/route.ts';
import { hashSecret, makeSecret } from '../../platform/secret.ts';
import * as read from './finding.read-model.ts';
import { findingRepository } from './finding.repository.ts';

type Audit = (manager: EntityManager, target: string, detail?: Record<string, unknown>) => Promise<void>;

/** Links for guests: a random token that opens one finding, kept as its hash only. */
export function createShareService(deps: Deps) {
  const { dataSource } = deps;
  const { manager } = dataSource;

  async function titleOf(stationId: number, findingId: number): Promise<string> {
    const headline = await read.readHeadline(manager, stationId, findingId);
    if (!headline) throw new NotFound('This finding');
    return headline.title;
  }

  return {
    async list(stationId: number, findingId: number) {
      await titleOf(stationId, findingId);
      return read.listShares(manager, stationId, findingId);
    },

    async create(
      stationId: number,
      findingId: number,
      { label, days }: BodyOf<typeof contract.createShare>,
      actor: Actor,
      audit: Audit,
    ): Promise<z.input<typeof contract.createShare.reply>> {
      const name = await titleOf(stationId, findingId);
      const token = makeSecret();
      const id = await inTransaction(dataSource, async (transaction) => {
        const added = await findingRepository.addShare(transaction, {
          ...{ stationId, findingId, label },
          tokenHash: hashSecret(token),
          createdBy: actor.userId,
          expiresAt: new Date(deps.now() + days * 86_400_000),
        });
        await audit(transaction, String(findingId), { name, share: added, label, days });
        return added;
      });
      const [share] = await read.listShares(manager, stationId, findingId, id);
      return { share: share!, token, url: `${deps.config.publicUrl}/f#${token}` };
    },

    async withdraw(stationId: number, findingId: number, id: string, audit: Audit): Promise<void> {
      const name = await titleOf(stationId, findingId);
      await inTransaction(dataSource, async (transaction) => {
        if (!(await findingRepository.withdrawShare(transaction, stationId, findingId, id)))
          throw new NotFound('This link');
        await audit(transaction, String(findingId), { name, share: id });
      });
    },

    /** Which finding a token opens. One answer for unknown, expired and withdrawn: a guess learns nothing. */
    async open(token: string): Promise<{ stationId: number; findingId: number; expiresAt: Date }> {
      const opened = await findingRepository.useShare(manager, hashSecret(token), new Date(deps.now()));
      if (!opened) {
        throw new AppError(
          404,
          'link-refused',
          'This link has expired, was withdrawn or was never given out. Ask for a new one.',
        );
      }
      return opened;
    },
  };
}
