import { randomUUID } from 'node:crypto';
import { existsSync } from 'node:fs';
import path from 'node:path';
import express from 'express';
import type { Express, RequestHandler } from 'express';
import helmet from 'helmet';
import { pinoHttp } from 'pino-http';
import { apiRoutes } from './features/index.ts';
import { createAuthenticator } from './middleware/authenticate.ts';
import { errorHandler, notFoundHandler } from './middleware/error-handler.ts';
import { mountRoutes } from './middleware/mount-routes.ts';
import { apiDocsPage } from './api-docs.ts';
import { openApiDocument } from './openapi.ts';
import { createMetrics } from './platform/metrics.ts';
import type { Deps } from './platform/deps.ts';

/** The whole HTTP application; never listens. `main.ts` gives it a port, tests give it a free one. */
export function createApp(deps: Deps): Express {
  const routes = apiRoutes(deps);
  const app = express();
  app.disable('x-powered-by');
  app.set('trust proxy', deps.config.trustProxy);
  app.set('query parser', 'simple');
  app.use(
    helmet({
      contentSecurityPolicy: {
        directives: {
          defaultSrc: ["'self'"],
          scriptSrc: ["'self'"],
          // Element Plus and the charts set style attributes.
          styleSrc: ["'self'", "'unsafe-inline'"],
          imgSrc: ["'self'", 'data:', 'blob:'],
          fontSrc: ["'self'"],
          connectSrc: ["'self'"],
          objectSrc: ["'none'"],
          frameAncestors: ["'none'"],
          baseUri: ["'self'"],
          formAction: ["'self'"],
          // A station's server on a LAN speaks plain HTTP.
          upgradeInsecureRequests: null,
        },
      },
      strictTransportSecurity: deps.config.publicUrl.startsWith('https:'),
    }),
  );
  const metrics = createMetrics(deps);
  app.use(metrics.observe);
  app.use(
    pinoHttp({
      logger: deps.logger,
      genReqId: () => randomUUID(),
      customLogLevel: (_req, res, error) => (error || res.statusCode >= 500 ? 'error' : 'debug'),
      serializers: {
        req: (req: { id: string; method: string; url: string }) => ({
          id: req.id,
          method: req.method,
          path: req.url.split('?')[0],
        }),
      },
    }),
  );
  app.get('/metrics', metrics.expose);
  app.use(['/f', '/api/shared-findings'], forGuestsOnly);

  const api = express.Router();
  api.use(express.json({ limit: '1mb' }));
  const document = JSON.stringify(openApiDocument(routes, deps.config.publicUrl));
  api.get('/openapi.json', (_req, res) => void res.type('application/json').send(document));
  api.get('/docs', (_req, res) => void res.type('html').send(apiDocsPage(routes)));
  mountRoutes(api, routes, {
    dataSource: deps.dataSource,
    authenticate: createAuthenticator({ dataSource: deps.dataSource, jwtSecret: deps.config.jwtSecret }),
    rateLimits: deps.rateLimits,
    checkReplies: process.env.NODE_ENV !== 'production',
  });
  api.use(notFoundHandler);
  app.use('/api', api);

  if (deps.config.clientFolder && existsSync(deps.config.clientFolder))
    serveClient(app, deps.config.clientFolder);
  app.use(notFoundHandler);
  app.use(errorHandler(deps.logger));
  return app;
}

/** A link that was handed to a guest must not end up in a search engine or a shared cache. */
const forGuestsOnly: RequestHandler = (_req, res, next) => {
  res.setHeader('X-Robots-Tag', 'noindex, nofollow, noarchive');
  res.setHeader('Cache-Control', 'no-store');
  next();
};

/** Hashed assets may be kept for a year; the page itself is asked for every time, so that a deploy shows. */
function serveClient(app: Express, folder: string): void {
  app.use(
    '/assets',
    express.static(path.join(folder, 'assets'), { immutable: true, maxAge: '365d', fallthrough: false }),
  );
  app.use(express.static(folder, { index: false, maxAge: '1h' }));
  app.get('/{*path}', (req, res, next) => {
    if (!req.accepts('html')) return next();
    res.setHeader('Cache-Control', 'no-cache');
    res.sendFile(path.join(folder, 'index.html'));
  });
}
