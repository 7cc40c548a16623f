import { refresh } from '../../shared/contracts/auth.ts';
import type { SignedIn } from '../../shared/contracts/auth.ts';
import { apiUrl } from './url.ts';
import { ApiProblem, networkProblem, problemFrom } from './problem.ts';

/**
 * The access token. It lives in this module's memory and nowhere else: a script that reads storage finds
 * nothing, and closing the tab forgets it. The refresh cookie brings it back.
 */
let access: { token: string; expiresAtMs: number } | null = null;
let refreshing: Promise<SignedIn> | null = null;
const signedOutListeners = new Set<() => void>();
const signedInListeners = new Set<(signedIn: SignedIn) => void>();

export function accessToken(): string | null {
  return access?.token ?? null;
}

/** Whether the token will still be good in `seconds`; for uploads, which should not fail after their last byte. */
export function accessLastsFor(seconds: number): boolean {
  return access !== null && access.expiresAtMs - Date.now() > seconds * 1000;
}

export function takeAccess(signedIn: SignedIn): void {
  access = { token: signedIn.accessToken, expiresAtMs: Date.parse(signedIn.expiresAt) };
  for (const listener of signedInListeners) listener(signedIn);
}

export function dropAccess(): void {
  access = null;
}

/** Called when the server says that the session is over. Returns the way to stop listening. */
export function onSignedOut(listener: () => void): () => void {
  signedOutListeners.add(listener);
  return () => signedOutListeners.delete(listener);
}

/** Called with every new token and the profile that came with it (roles may have changed). */
export function onSignedIn(listener: (signedIn: SignedIn) => void): () => void {
  signedInListeners.add(listener);
  return () => signedInListeners.delete(listener);
}

/**
 * A new access token for the refresh cookie. One at a time in this tab and, by the browser's lock, in all tabs:
 * the cookie rotates, and two tabs that present the same one look to the server like a theft.
 * Rejects with status 401 when nobody is signed in.
 */
export function refreshAccess(): Promise<SignedIn> {
  refreshing ??= underLock(askUntilDecided).finally(() => (refreshing = null));
  return refreshing;
}

async function underLock<T>(work: () => Promise<T>): Promise<T> {
  // Browsers have no locks on plain HTTP outside loopback; there `askUntilDecided` sorts the tabs out.
  const locks = typeof navigator === 'undefined' ? undefined : navigator.locks;
  return locks ? await locks.request('whichwire-refresh', work) : await work();
}

/** Another tab presented the same cookie a moment earlier: its answer brings this tab the next cookie. */
async function askUntilDecided(): Promise<SignedIn> {
  for (let pauseMs = 100; ; pauseMs *= 2) {
    try {
      return await askForAccess();
    } catch (error) {
      const isRace = error instanceof ApiProblem && error.code === 'refresh-raced';
      if (!isRace || pauseMs > 2000) throw error;
      await new Promise((resolve) => setTimeout(resolve, pauseMs));
    }
  }
}

async function askForAccess(): Promise<SignedIn> {
  let response: Response;
  let text: string;
  try {
    response = await fetch(apiUrl(refresh.path), { method: refresh.method, credentials: 'same-origin' });
    text = await response.text();
  } catch (error) {
    throw networkProblem(error);
  }
  if (!response.ok) {
    const problem = problemFrom(response.status, response.headers.get('content-type'), text);
    // Only a plain "no" ends the session: a restarting server must not throw people out.
    if (problem.status === 401 || problem.status === 403) {
      const wasSignedIn = access !== null;
      dropAccess();
      if (wasSignedIn) for (const listener of signedOutListeners) listener();
    }
    throw problem;
  }
  const parsed = refresh.reply.safeParse(JSON.parse(text));
  if (!parsed.success) {
    throw new ApiProblem('The server sent an answer that this page cannot read. Load the page again.', {
      status: response.status,
      code: 'unreadable',
    });
  }
  takeAccess(parsed.data);
  return parsed.data;
}
