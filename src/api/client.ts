/**
 * The one way to the server. Paths, parameters, bodies and replies come from shared/contracts; views and stores
 * call `request(contract, { params, query, body, signal })` and get the typed reply or an `ApiProblem`.
 */
import type {
  BodyInput,
  BodyOf,
  Endpoint,
  ParamsOf,
  QueryInput,
  QueryOf,
  ReplyOf,
} from '../../shared/contracts/endpoint.ts';
import { accessLastsFor, accessToken, refreshAccess } from './access.ts';
import { ApiProblem, networkProblem, parseJson, problemFrom } from './problem.ts';
import { apiUrl } from './url.ts';

/** What goes in before defaults are filled, with the types that coerced fields (ids in paths) come out with. */
type Given<In, Out> = unknown extends In
  ? Out
  : In extends readonly (infer InItem)[]
    ? Out extends readonly (infer OutItem)[]
      ? Given<InItem, OutItem>[]
      : In
    : In extends object
      ? Out extends object
        ? { [K in keyof In]: K extends keyof Out ? Given<In[K], Out[K]> : In[K] }
        : In
      : In;
type IsEmpty<T> = string extends keyof T ? true : keyof T extends never ? true : false;
type HasOnlyOptional<T> = Record<never, never> extends T ? true : false;

type ParamsPart<E extends Endpoint> =
  IsEmpty<ParamsOf<E>> extends true ? { params?: undefined } : { params: ParamsOf<E> };
type QueryPart<E extends Endpoint> =
  IsEmpty<QueryOf<E>> extends true
    ? { query?: undefined }
    : HasOnlyOptional<Given<QueryInput<E>, QueryOf<E>>> extends true
      ? { query?: Given<QueryInput<E>, QueryOf<E>> }
      : { query: Given<QueryInput<E>, QueryOf<E>> };
type BodyPart<E extends Endpoint> =
  undefined extends BodyInput<E> ? { body?: undefined } : { body: Given<BodyInput<E>, BodyOf<E>> };
export type RequestInput<E extends Endpoint> = ParamsPart<E> &
  QueryPart<E> &
  BodyPart<E> & { signal?: AbortSignal };
type Rest<E extends Endpoint> =
  HasOnlyOptional<RequestInput<E>> extends true ? [input?: RequestInput<E>] : [input: RequestInput<E>];

interface LooseInput {
  params?: unknown;
  query?: unknown;
  body?: unknown;
  signal?: AbortSignal;
}

/**
 * Asks and answers JSON. An expired token is refreshed once and the request repeated.
 * @throws ApiProblem with a readable message; a DOMException named AbortError when `signal` fired.
 */
export async function request<E extends Endpoint>(endpoint: E, ...[input]: Rest<E>): Promise<ReplyOf<E>> {
  const response = await ask(endpoint, (input ?? {}) as LooseInput);
  const text = await bodyOf(input?.signal, () => response.text());
  if (!response.ok) throw problemFrom(response.status, response.headers.get('content-type'), text);
  return readReply(endpoint, response.status, text);
}

/** A file that the server makes, with the name it suggests. Save it with `saveBlob` (composables/save-file.ts). */
export async function download<E extends Endpoint>(
  endpoint: E,
  ...[input]: Rest<E>
): Promise<{ blob: Blob; fileName: string | null }> {
  const response = await ask(endpoint, (input ?? {}) as LooseInput);
  const blob = await bodyOf(input?.signal, () => response.blob());
  if (!response.ok) {
    throw problemFrom(response.status, response.headers.get('content-type'), await blob.text());
  }
  return { blob, fileName: fileNameIn(response.headers.get('content-disposition')) };
}

/**
 * An authorised answer whose body is read as it comes (event streams).
 * @throws as `request`, also for a status that is not a success
 */
export async function openBody(
  endpoint: Endpoint,
  input: { params?: unknown; query?: unknown; signal?: AbortSignal },
): Promise<ReadableStream<Uint8Array>> {
  const response = await ask(endpoint, input);
  if (response.ok && response.body) return response.body;
  const text = await bodyOf(input.signal, () => response.text());
  throw problemFrom(response.status, response.headers.get('content-type'), text);
}

export interface UploadProgress {
  sentBytes: number;
  totalBytes: number;
}
export type UploadInput<E extends Endpoint> = ParamsPart<E> &
  QueryPart<E> & { file: File; signal?: AbortSignal; onProgress?: (progress: UploadProgress) => void };

/**
 * Sends one file as multipart field `file`. XMLHttpRequest, because fetch cannot tell how much has been sent.
 * @throws as `request`
 */
export async function upload<E extends Endpoint>(endpoint: E, input: UploadInput<E>): Promise<ReplyOf<E>> {
  // A token that runs out on the way would cost the whole upload.
  if (!accessLastsFor(120)) await refreshAccess();
  const url = apiUrl(endpoint.path, input.params, input.query);
  let answer = await sendFile(endpoint.method, url, input);
  if (answer.status === 401) {
    await refreshAccess();
    answer = await sendFile(endpoint.method, url, input);
  }
  if (answer.status < 200 || answer.status > 299) {
    throw problemFrom(answer.status, answer.contentType, answer.text);
  }
  return readReply(endpoint, answer.status, answer.text);
}

async function ask(endpoint: Endpoint, input: LooseInput): Promise<Response> {
  const url = apiUrl(endpoint.path, input.params, input.query);
  // Signing in and the like work without a token, and their 401 means "wrong password", not "token expired".
  const token = endpoint.path.startsWith('/auth/') ? null : accessToken();
  const first = await send(endpoint, url, input, token);
  if (first.status !== 401 || token === null) return first;
  // Another request may have brought a new token while this one was on its way.
  if (accessToken() === token) {
    await refreshAccess();
    input.signal?.throwIfAborted();
  }
  return send(endpoint, url, input, accessToken());
}

async function send(
  endpoint: Endpoint,
  url: string,
  input: LooseInput,
  token: string | null,
): Promise<Response> {
  const headers = new Headers({
    accept: `${endpoint.media?.reply ?? 'application/json'}, application/problem+json`,
  });
  if (token !== null) headers.set('authorization', `Bearer ${token}`);
  if (input.body !== undefined) headers.set('content-type', 'application/json');
  try {
    return await fetch(url, {
      method: endpoint.method,
      credentials: 'same-origin',
      headers,
      body: input.body === undefined ? undefined : JSON.stringify(input.body),
      signal: input.signal,
    });
  } catch (error) {
    throw failureOf(error, input.signal);
  }
}

async function bodyOf<T>(signal: AbortSignal | undefined, read: () => Promise<T>): Promise<T> {
  try {
    return await read();
  } catch (error) {
    throw failureOf(error, signal);
  }
}

function failureOf(error: unknown, signal: AbortSignal | undefined): unknown {
  return signal?.aborted ? abortError() : networkProblem(error);
}

function abortError(): DOMException {
  return new DOMException('The request was taken back.', 'AbortError');
}

function readReply<E extends Endpoint>(endpoint: E, status: number, text: string): ReplyOf<E> {
  if (status === 204 || text === '') return undefined as ReplyOf<E>;
  const reply = parseJson(text);
  if (reply === undefined) {
    throw new ApiProblem('The server sent an answer that this page cannot read. Load the page again.', {
      status,
      code: 'unreadable',
    });
  }
  // In production the server has checked its own reply against the same schema; checking a large answer twice
  // would only cost the reader time.
  if (!import.meta.env.DEV) return reply as ReplyOf<E>;
  const parsed = endpoint.reply.safeParse(reply);
  if (parsed.success) return parsed.data as ReplyOf<E>;
  const where = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`).join('; ');
  throw new ApiProblem(`${endpoint.method} ${endpoint.path} answers against its contract: ${where}`, {
    status,
    code: 'contract',
  });
}

function fileNameIn(disposition: string | null): string | null {
  const encoded = disposition?.match(/filename\*=UTF-8''([^;]+)/i)?.[1];
  if (encoded) return decodeURIComponent(encoded);
  return disposition?.match(/filename="?([^";]+)"?/i)?.[1] ?? null;
}

interface UploadAnswer {
  status: number;
  contentType: string | null;
  text: string;
}

function sendFile(
  method: string,
  url: string,
  input: { file: File; signal?: AbortSignal; onProgress?: (progress: UploadProgress) => void },
): Promise<UploadAnswer> {
  const { file, signal, onProgress } = input;
  return new Promise((resolve, reject) => {
    if (signal?.aborted) {
      reject(abortError());
      return;
    }
    const xhr = new XMLHttpRequest();
    const stop = () => xhr.abort();
    const settle = (done: () => void) => {
      signal?.removeEventListener('abort', stop);
      done();
    };
    signal?.addEventListener('abort', stop);
    xhr.upload.addEventListener('progress', (event) =>
      onProgress?.({ sentBytes: event.loaded, totalBytes: event.lengthComputable ? event.total : file.size }),
    );
    xhr.addEventListener('load', () =>
      settle(() =>
        resolve({
          status: xhr.status,
          contentType: xhr.getResponseHeader('content-type'),
          text: xhr.responseText,
        }),
      ),
    );
    xhr.addEventListener('error', () => settle(() => reject(networkProblem())));
    xhr.addEventListener('abort', () => settle(() => reject(abortError())));
    xhr.open(method, url);
    const token = accessToken();
    if (token !== null) xhr.setRequestHeader('authorization', `Bearer ${token}`);
    xhr.setRequestHeader('accept', 'application/json, application/problem+json');
    const form = new FormData();
    form.append('file', file, file.name);
    xhr.send(form);
  });
}
