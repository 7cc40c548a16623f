const parentPollMs = 500;
const sameKeyPressMs = 1_000;

/**
 * Everything that means "stop": Ctrl-C, a terminal that closes, a polite kill, and the end of the npm that
 * started us. npm passes signals on to the command it runs, but when it is killed with -9, nobody tells us.
 *
 * @param {() => void} stop called once
 * @returns {{ onImpatience: (react: () => void) => void }} a second request, more than a second after the
 *   first, is one by somebody who will not wait: npm passes Ctrl-C on, so that one key press arrives twice
 */
export function listenForStopRequests(stop) {
  let firstAt = Number.NaN;
  /** @type {() => void} */
  let onImpatience = () => undefined;
  const request = () => {
    if (Number.isNaN(firstAt)) {
      firstAt = performance.now();
      stop();
    } else if (performance.now() - firstAt > sameKeyPressMs) {
      onImpatience();
    }
  };
  for (const name of /** @type {const} */ (['SIGINT', 'SIGTERM', 'SIGHUP'])) process.on(name, request);
  if (process.env.npm_lifecycle_event !== undefined) {
    const parent = process.ppid;
    const watch = setInterval(() => {
      if (process.ppid === parent) return;
      clearInterval(watch);
      request();
    }, parentPollMs);
    watch.unref();
  }
  return {
    onImpatience: (react) => {
      onImpatience = react;
    },
  };
}
