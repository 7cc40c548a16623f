import { pino } from 'pino';
import type { Logger } from 'pino';

export type { Logger };

/** Structured logs, one JSON object a line. What could be a secret is cut out before it is written. */
export function createLogger(name: string, level = 'info'): Logger {
  return pino({
    name,
    level,
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
  });
}
