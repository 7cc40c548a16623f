import pg from 'pg';
import { type DataSource, type EntityManager, QueryFailedError } from 'typeorm';

export type Isolation = 'READ COMMITTED' | 'REPEATABLE READ' | 'SERIALIZABLE';

export interface TransactionSettings {
  /** `READ COMMITTED` unless told. */
  isolation?: Isolation;
  /** How often the work is done again after losing to another transaction; 3 unless told. */
  retries?: number;
}

/**
 * Does the work in one transaction: all of it is stored or none. When the database gives up a transaction
 * in favour of another (serialization failure 40001, deadlock 40P01) the work is done again from the
 * start, after a short random pause so that the two do not meet again; then the error is thrown.
 *
 * The work may therefore run more than once: it must query through the given manager only, and do nothing
 * outside the database (no mail, no reply) before this returns.
 */
export async function inTransaction<Result>(
  dataSource: DataSource,
  work: (manager: EntityManager) => Promise<Result>,
  settings: TransactionSettings = {},
): Promise<Result> {
  const retries = settings.retries ?? 3;
  for (let attempt = 0; ; attempt += 1) {
    try {
      return await dataSource.transaction(settings.isolation ?? 'READ COMMITTED', work);
    } catch (error) {
      if (attempt >= retries || !lostToAnotherTransaction(error)) throw error;
      const pauseMs = Math.random() * 20 * 2 ** attempt;
      await new Promise((resolve) => setTimeout(resolve, pauseMs));
    }
  }
}

/** A row with this key exists already (23505). */
export function isUniqueViolation(error: unknown, constraint?: string): boolean {
  return isViolation(error, '23505', constraint);
}

/** The row overlaps one that exists (23P01): a dwell on a receiver that is on another antenna then. */
export function isExclusionViolation(error: unknown, constraint?: string): boolean {
  return isViolation(error, '23P01', constraint);
}

/** The row points to one that does not exist, or is pointed to by one that does (23503). */
export function isForeignKeyViolation(error: unknown, constraint?: string): boolean {
  return isViolation(error, '23503', constraint);
}

/** On a partitioned table the constraint is named after the partition: ask for `spot` without a name. */
function isViolation(error: unknown, code: string, constraint: string | undefined): boolean {
  const details = databaseError(error);
  return details.code === code && (constraint === undefined || details.constraint === constraint);
}

function lostToAnotherTransaction(error: unknown): boolean {
  const { code } = databaseError(error);
  return code === '40001' || code === '40P01';
}

/** What the database said: TypeORM wraps the driver's error, a COPY stream throws it bare. */
function databaseError(error: unknown): { code?: string | undefined; constraint?: string | undefined } {
  const inner = error instanceof QueryFailedError ? error.driverError : error;
  return inner instanceof pg.DatabaseError ? inner : {};
}
