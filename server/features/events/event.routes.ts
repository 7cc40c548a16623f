import { eventStream } from '../../../shared/contracts/event.ts';
import type { Deps } from '../../platform/deps.ts';
import { TooMany } from '../../platform/errors.ts';
import { answered, inStation, route } from '../../platform/route.ts';
import type { Route } from '../../platform/route.ts';

const heartbeatMs = 20_000;
/** A browser that does not read must not fill this process's memory. */
const unreadLimitBytes = 1_000_000;
/** Authority is checked when a stream opens; it is opened anew this often, so that a lost role ends it. */
const longestStreamMs = 10 * 60_000;
const streamsPerProcess = 2_000;

export function eventRoutes(deps: Deps): Route[] {
  return [
    route(eventStream, { access: inStation('station:read') }, async ({ params, res }) => {
      if (deps.eventHub.subscribers >= streamsPerProcess) throw new TooMany(30);
      res.writeHead(200, {
        'Content-Type': 'text/event-stream; charset=utf-8',
        'Cache-Control': 'no-store',
        'X-Accel-Buffering': 'no',
      });
      res.write(': open\n\n');
      const unsubscribe = deps.eventHub.subscribe(params.stationId, (event) => {
        if (res.writableLength > unreadLimitBytes) res.destroy();
        else res.write(`data: ${JSON.stringify(event)}\n\n`);
      });
      const heartbeat = setInterval(() => res.write(': still here\n\n'), heartbeatMs);
      const end = setTimeout(() => res.end(), longestStreamMs);
      res.once('close', () => {
        unsubscribe();
        clearInterval(heartbeat);
        clearTimeout(end);
      });
      return answered;
    }),
  ];
}
