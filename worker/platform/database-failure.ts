import pg from 'pg';
import { QueryFailedError } from 'typeorm';
import type { FailureKind } from '../feed/buffer.ts';

/**
 * Classes of SQLSTATE that the data themselves cause: a value out of range (22), a broken constraint (23),
 * a program limit (54), an exception that our own functions raise (P0), an internal error (XX).
 */
const lastingClasses = new Set(['22', '23', '54', 'P0', 'XX']);

/**
 * Whether writing the same again can help. In doubt it can: taking a lost connection for bad data would
 * refuse good spots, while the opposite mistake only holds a feed up, in plain view.
 */
export function classifyFailure(error: unknown): FailureKind {
  // A number that does not fit its column is found while rows are packed.
  if (error instanceof RangeError || error instanceof TypeError) return 'lasting';
  const inner: unknown = error instanceof QueryFailedError ? error.driverError : error;
  if (!(inner instanceof pg.DatabaseError)) return 'passing';
  return lastingClasses.has(inner.code?.slice(0, 2) ?? '') ? 'lasting' : 'passing';
}
