import { timingSafeEqual } from 'node:crypto';
import type { RequestHandler } from 'express';
import { Gauge, Histogram, Registry, collectDefaultMetrics } from 'prom-client';
import type { Deps } from './deps.ts';

/** Prometheus metrics: for loopback, or for whoever holds METRICS_TOKEN. */
export function createMetrics(deps: Deps): { observe: RequestHandler; expose: RequestHandler } {
  const registry = new Registry();
  collectDefaultMetrics({ register: registry });
  const seconds = new Histogram({
    name: 'whichwire_http_request_seconds',
    help: 'Time to answer, by method, route and status',
    labelNames: ['method', 'route', 'status'],
    buckets: [0.005, 0.02, 0.05, 0.1, 0.3, 1, 3, 10],
    registers: [registry],
  });
  new Gauge({
    name: 'whichwire_event_subscribers',
    help: 'Browsers that listen to events',
    registers: [registry],
    collect() {
      this.set(deps.eventHub.subscribers);
    },
  });

  return {
    observe(req, res, next) {
      const stop = seconds.startTimer({ method: req.method });
      res.once('close', () => {
        const route: unknown = (req.route as { path?: unknown } | undefined)?.path;
        stop({ route: typeof route === 'string' ? route : 'other', status: String(res.statusCode) });
      });
      next();
    },
    expose(req, res, next) {
      if (!mayRead(req.headers.authorization, req.socket.remoteAddress, deps)) return next();
      registry
        .metrics()
        .then((text) => res.type(registry.contentType).send(text))
        .catch(next);
    },
  };
}

function mayRead(authorization: string | undefined, address: string | undefined, deps: Deps): boolean {
  const token = deps.config.metricsToken;
  if (token) {
    const given = Buffer.from(authorization ?? '');
    const wanted = Buffer.from(`Bearer ${token}`);
    return given.length === wanted.length && timingSafeEqual(given, wanted);
  }
  // Behind a proxy every caller looks local: then a token is needed.
  const isLocal = address === '127.0.0.1' || address === '::1' || address === '::ffff:127.0.0.1';
  return isLocal && deps.config.trustProxy === 0;
}
