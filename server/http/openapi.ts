import { z } from 'zod';
import { problem } from '../../shared/api/common.ts';
import type { Endpoint } from './endpoint.ts';
import type { AnyContract } from './reply.ts';

type Json = Record<string, unknown>;

/** The OpenAPI 3.1 document of every route, made from the same schemas that check the requests. */
export function openApiDocument(endpoints: readonly Endpoint[]): Json {
  const paths: Record<string, Json> = {
    '/health': {
      get: { operationId: 'health', summary: 'Is the database there', responses: ok({ type: 'object' }) },
    },
    '/openapi.json': {
      get: { operationId: 'openapi', summary: 'This document', responses: ok({ type: 'object' }) },
    },
  };
  for (const { contract } of endpoints) {
    const path = contract.path.replace(/:(\w+)/g, '{$1}');
    const entry = paths[path] ?? {};
    entry[contract.method.toLowerCase()] = operation(contract);
    paths[path] = entry;
  }
  return {
    openapi: '3.1.0',
    info: { title: 'Quayword', version: '1', description: "Keeps yachts' Wi-Fi private." },
    servers: [{ url: '/api' }],
    paths,
    components: {
      schemas: { Problem: schema(problem) },
      securitySchemes: { session: { type: 'apiKey', in: 'cookie', name: '__Host-quayword' } },
    },
  };
}

const schema = (type: z.ZodType): Json =>
  z.toJSONSchema(type, { target: 'draft-2020-12', unrepresentable: 'any', io: 'input' }) as Json;

const ok = (json: Json) => ({
  200: { description: 'Done', content: { 'application/json': { schema: json } } },
});

function operation(contract: AnyContract): Json {
  const success = String(contract.status ?? (contract.response === 'empty' ? 204 : 200));
  return {
    operationId: contract.name,
    summary: contract.summary,
    security: contract.access.kind === 'anonymous' ? [] : [{ session: [] }],
    'x-access': contract.access,
    ...(contract.fresh ? { 'x-fresh-proof': true } : {}),
    parameters: [...parameters(contract.params, 'path'), ...parameters(contract.query, 'query')],
    ...(contract.body
      ? {
          requestBody: { required: true, content: { 'application/json': { schema: schema(contract.body) } } },
        }
      : {}),
    responses: {
      [success]: { description: 'Done', ...content(contract) },
      default: {
        description: 'What went wrong and what to do',
        content: { 'application/problem+json': { schema: { $ref: '#/components/schemas/Problem' } } },
      },
    },
  };
}

function content(contract: AnyContract): Json {
  if (contract.response === 'pdf') return { content: { 'application/pdf': {} } };
  if (contract.response === 'csv') return { content: { 'text/csv': {} } };
  if (contract.response === 'empty') return {};
  return { content: { 'application/json': { schema: schema(contract.response) } } };
}

function parameters(type: z.ZodType | undefined, place: 'path' | 'query'): Json[] {
  if (!type) return [];
  const { properties = {}, required = [] } = schema(type) as {
    properties?: Record<string, Json>;
    required?: string[];
  };
  return Object.entries(properties).map(([name, inner]) => ({
    name,
    in: place,
    required: place === 'path' || required.includes(name),
    schema: inner,
  }));
}
