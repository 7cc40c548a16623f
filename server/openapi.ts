import { z } from 'zod';
import type { ZodType } from 'zod';
import { noBody, noReply, problem } from '../shared/contracts/common.ts';
import type { Route } from './platform/route.ts';

/** The OpenAPI 3.1 document of all routes, made from the same contracts that validate the requests. */
export function openApiDocument(routes: Route[], publicUrl: string): Record<string, unknown> {
  const paths: Record<string, Record<string, unknown>> = {};
  for (const r of routes) {
    const path = r.endpoint.path.replace(/:(\w+)/g, '{$1}');
    paths[path] = { ...paths[path], [r.endpoint.method.toLowerCase()]: operation(r) };
  }
  return {
    openapi: '3.1.0',
    info: {
      title: 'Whichwire',
      version: '0.1.0',
      description:
        'Which receive antenna hears best. Times are ISO 8601 in UTC; errors are RFC 9457 problems.',
    },
    servers: [{ url: `${publicUrl}/api` }],
    components: {
      securitySchemes: { bearer: { type: 'http', scheme: 'bearer' } },
      schemas: { Problem: jsonSchema(problem, 'output') },
    },
    paths,
  };
}

function operation(r: Route): Record<string, unknown> {
  const e = r.endpoint;
  const body = e.media?.request
    ? {
        [e.media.request]: {
          schema: { type: 'object', properties: { file: { type: 'string', format: 'binary' } } },
        },
      }
    : e.body === noBody
      ? null
      : { 'application/json': { schema: jsonSchema(e.body, 'input') } };
  const status = e.status ?? (e.reply === noReply ? 204 : 200);
  return {
    summary: e.summary,
    tags: [
      e.path.split('/').find((part) => part && part !== 'stations' && !part.startsWith(':')) ?? 'stations',
    ],
    'x-access': describeAccess(r),
    security: r.access.kind === 'public' ? [] : [{ bearer: [] }],
    parameters: [...parameters(e.params, 'path'), ...parameters(e.query, 'query')],
    ...(body ? { requestBody: { required: true, content: body } } : {}),
    responses: {
      [status]: {
        description: 'Success',
        ...(status === 204
          ? {}
          : {
              content: { [e.media?.reply ?? 'application/json']: { schema: jsonSchema(e.reply, 'output') } },
            }),
      },
      default: {
        description: 'A problem (RFC 9457)',
        content: { 'application/problem+json': { schema: { $ref: '#/components/schemas/Problem' } } },
      },
    },
  };
}

function describeAccess(r: Route): string {
  if (r.access.kind === 'public') return 'anybody';
  if (r.access.kind === 'session') return 'whoever is signed in';
  const token = r.access.tokenScope ? `, or an API token with ${r.access.tokenScope}` : '';
  return `members with ${r.access.permission}${token}`;
}

function parameters(schema: ZodType, place: 'path' | 'query'): Record<string, unknown>[] {
  const json = jsonSchema(schema, 'input') as { properties?: Record<string, unknown>; required?: string[] };
  return Object.entries(json.properties ?? {}).map(([name, property]) => ({
    name,
    in: place,
    required: place === 'path' || (json.required ?? []).includes(name),
    schema: property,
  }));
}

function jsonSchema(schema: ZodType, io: 'input' | 'output'): Record<string, unknown> {
  const json: Record<string, unknown> = z.toJSONSchema(schema, { io, unrepresentable: 'any' });
  delete json.$schema;
  return json;
}
