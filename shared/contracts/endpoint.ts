import type { ZodType, z } from 'zod';

export type HttpMethod = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE';

/**
 * One thing that can be asked of the API. The server mounts it, the client calls it, the OpenAPI document
 * is printed from it and the tests walk it: there is no second description anywhere.
 */
export interface Endpoint<
  Params extends ZodType = ZodType,
  Query extends ZodType = ZodType,
  Body extends ZodType = ZodType,
  Reply extends ZodType = ZodType,
> {
  method: HttpMethod;
  /** Express-style path below /api, for example /stations/:stationId/dwells. */
  path: string;
  /** One line for the reader of the API's document. */
  summary: string;
  params: Params;
  query: Query;
  body: Body;
  /** What a success answers with; `noReply` for 204. */
  reply: Reply;
  /** Success status; 200 unless said, 204 where the reply is `noReply`. */
  status?: number;
  /** Set where the body or the reply is not JSON (uploads, downloads, event streams). */
  media?: { request?: 'multipart/form-data'; reply?: string };
}

export type ParamsOf<E extends Endpoint> = z.output<E['params']>;
export type QueryOf<E extends Endpoint> = z.output<E['query']>;
export type BodyOf<E extends Endpoint> = z.output<E['body']>;
export type ReplyOf<E extends Endpoint> = z.output<E['reply']>;
/** What a caller passes in: before defaults are filled. */
export type QueryInput<E extends Endpoint> = z.input<E['query']>;
export type BodyInput<E extends Endpoint> = z.input<E['body']>;
