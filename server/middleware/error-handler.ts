import type { ErrorRequestHandler, RequestHandler } from 'express';
import { QueryFailedError } from 'typeorm';
import type { Problem } from '../../shared/contracts/common.ts';
import { AppError, InvalidRequest, NotFound, TooLarge, Unavailable } from '../platform/errors.ts';
import type { Logger } from '../platform/logger.ts';

const titles: Record<number, string> = {
  400: 'The request is not valid',
  401: 'Not signed in',
  403: 'Not allowed',
  404: 'Not found',
  409: 'Conflict',
  413: 'Too large',
  429: 'Too many requests',
  500: 'Something went wrong here',
  503: 'Not available',
};

export const notFoundHandler: RequestHandler = (_req, _res, next) => next(new NotFound('This address'));

/** The one place where errors become answers. What is not an AppError is a defect and is not explained. */
export function errorHandler(logger: Logger): ErrorRequestHandler {
  return (error: unknown, req, res, next) => {
    const requestId = String(req.id ?? '');
    const known = toAppError(error);
    if (!known) logger.error({ err: error, requestId, method: req.method, path: req.path }, 'request failed');
    if (res.headersSent) return next(error);
    const status = known?.status ?? 500;
    const problem: Problem = {
      type: 'about:blank',
      title: titles[status] ?? 'Problem',
      status,
      code: known?.code ?? 'internal',
      detail: known?.message ?? `This should not have happened. Quote ${requestId} when you report it.`,
      requestId,
    };
    if (known && known.errors.length > 0) problem.errors = known.errors;
    for (const [name, value] of Object.entries(known?.headers ?? {})) res.setHeader(name, value);
    res.status(status).type('application/problem+json').send(JSON.stringify(problem));
  };
}

function toAppError(error: unknown): AppError | null {
  if (error instanceof AppError) return error;
  if (isBodyParserError(error)) {
    if (error.type === 'entity.too.large') return new TooLarge('The request body is larger than 1 MB.');
    return new InvalidRequest('The request body is not valid JSON in UTF-8.');
  }
  return isDatabaseAway(error) ? new Unavailable() : null;
}

function isBodyParserError(error: unknown): error is { type: string } {
  const type = (error as { type?: unknown } | null)?.type;
  return typeof type === 'string' && /^(entity|charset|encoding|request)\./.test(type);
}

const awayCodes = new Set(['57P01', '57P02', '57P03', 'ECONNREFUSED', 'ECONNRESET', 'EPIPE']);

/** The database is restarting: say so and let the caller try again, instead of a bare 500. */
function isDatabaseAway(error: unknown): boolean {
  const cause: unknown = error instanceof QueryFailedError ? error.driverError : error;
  const code = (cause as { code?: unknown } | null)?.code;
  if (typeof code === 'string' && awayCodes.has(code)) return true;
  const message = cause instanceof Error ? cause.message : '';
  return /Connection terminated|timeout exceeded when trying to connect/.test(message);
}
