import { problem } from '../../shared/contracts/common.ts';
import type { Problem } from '../../shared/contracts/common.ts';

/**
 * Every way in which a request can fail, except that its caller took it back (see `isAbort`). `message` is a
 * sentence for the screen.
 */
export class ApiProblem extends Error {
  override name = 'ApiProblem';
  /** HTTP status; 0 when no answer came. */
  readonly status: number;
  /** The server's word for the problem; `network` or `unreadable` when it comes from here. */
  readonly code: string;
  readonly errors: readonly { path: string; message: string }[];
  /** Quote this to whoever reads the server's log. */
  readonly requestId: string | null;

  constructor(
    message: string,
    given: { status: number; code: string; errors?: Problem['errors']; requestId?: string },
    options?: ErrorOptions,
  ) {
    super(message, options);
    this.status = given.status;
    this.code = given.code;
    this.errors = given.errors ?? [];
    this.requestId = given.requestId ?? null;
  }

  /** The first sentence for each field, by its path in the body ("station.locator"), to show beside it. */
  get fieldErrors(): Record<string, string> {
    const byPath: Record<string, string> = {};
    // The server names the part of the request too: `body.station.locator`.
    for (const { path, message } of this.errors) byPath[path.replace(/^body\./, '')] ??= message;
    return byPath;
  }
}

/** The request was taken back on purpose (a newer one replaced it, the page was left): nothing to show. */
export function isAbort(error: unknown): boolean {
  return error instanceof DOMException && error.name === 'AbortError';
}

/** Anything thrown, as something that can be shown. Programming errors keep their own message. */
export function asProblem(error: unknown): ApiProblem {
  if (error instanceof ApiProblem) return error;
  const message = error instanceof Error ? error.message : String(error);
  return new ApiProblem(message, { status: 0, code: 'client' }, { cause: error });
}

export function networkProblem(cause?: unknown): ApiProblem {
  const sentence =
    typeof navigator !== 'undefined' && navigator.onLine === false
      ? 'This device is offline. Reconnect and try again.'
      : 'The server did not answer. Check the connection and try again.';
  return new ApiProblem(sentence, { status: 0, code: 'network' }, { cause });
}

const sentences: Record<number, string> = {
  401: 'You are signed out. Sign in again.',
  403: 'Your role at this station does not allow that.',
  404: 'There is nothing here any more. It may have been removed.',
  408: 'The request took too long. Try again.',
  409: 'Somebody else changed this meanwhile. Load it again and repeat your change.',
  413: 'That is larger than the server accepts.',
  429: 'Too many attempts. Wait a little and try again.',
  502: 'The server is restarting. Try again in a moment.',
  503: 'The server is not ready. Try again in a moment.',
  504: 'The server took too long to answer. Try again.',
};

/** A failed answer's text, as RFC 9457 problem or (from a proxy in between) as anything else. */
export function problemFrom(status: number, contentType: string | null, text: string): ApiProblem {
  if (contentType?.includes('json')) {
    const parsed = problem.safeParse(parseJson(text));
    if (parsed.success) {
      const { code, errors, requestId, detail, title } = parsed.data;
      return new ApiProblem(detail ?? title, { status, code, errors, requestId });
    }
  }
  return new ApiProblem(sentences[status] ?? `The server could not do that (status ${status}). Try again.`, {
    status,
    code: 'unreadable',
  });
}

export function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined;
  }
}
