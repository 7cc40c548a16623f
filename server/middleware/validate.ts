import type { ZodError } from 'zod';
import type { ZodType } from 'zod';
import { InvalidRequest } from '../platform/errors.ts';

/** Parses one part of a request; says which fields are wrong, by path, and what is accepted. */
export function parsePart<T extends ZodType>(schema: T, value: unknown, part: 'path' | 'query' | 'body') {
  const parsed = schema.safeParse(value);
  if (!parsed.success) {
    throw new InvalidRequest('Some fields have to change.', fieldErrors(parsed.error, part));
  }
  return parsed.data;
}

function fieldErrors(error: ZodError, part: string) {
  return error.issues.map((issue) => ({ path: [part, ...issue.path].join('.'), message: issue.message }));
}
