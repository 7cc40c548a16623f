import { pino, stdSerializers } from 'pino';
import type { DestinationStream, Logger, LoggerOptions } from 'pino';

export type { Logger };

/** Structured logs, one JSON object a line. What could be a secret is cut out before it is written. */
export function createLogger(name: string, level = 'info', destination?: DestinationStream): Logger {
  const options: LoggerOptions = {
    name,
    level,
    serializers: { err: errorWithoutValues },
    base: { name, pid: process.pid },
    timestamp: pino.stdTimeFunctions.isoTime,
    redact: {
      paths: [
        'req.headers.authorization',
        'req.headers.cookie',
        'res.headers["set-cookie"]',
        '*.password',
        '*.token',
        '*.secret',
        '*.passwordHash',
      ],
      censor: '[cut out]',
    },
  };
  return destination ? pino(options, destination) : pino(options);
}

/**
 * A failed query carries what was to be stored: its parameters, and the failing row in the database's detail.
 * Password hashes and addresses are among them, and a log is read by more people than the database is.
 */
function errorWithoutValues(error: Error): Record<string, unknown> {
  const values = new Set(['parameters', 'driverError', 'detail', 'where']);
  return Object.fromEntries(Object.entries(stdSerializers.err(error)).filter(([name]) => !values.has(name)));
}
