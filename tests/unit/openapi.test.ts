import { readdirSync } from 'node:fs'
import { join, relative } from 'node:path'
import { describe, expect, it, vi } from 'vitest'
import { z } from 'zod'
import { PATHS } from '@/app/openapi.json/paths'
import { GET } from '@/app/openapi.json/route'
import { PERMISSIONS } from '@/lib/auth/permissions'
import { METHODS, openApiDocument } from '@/lib/openapi'

// The first import loads the database library, which takes its time on a busy machine.
vi.setConfig({ testTimeout: 60_000 })

const folder = join(import.meta.dirname, '../../app/api/v1')
const files = readdirSync(folder, { recursive: true, withFileTypes: true })
  .filter((entry) => entry.isFile() && entry.name === 'route.ts')
  .map((entry) => join(entry.parentPath, entry.name))

const schema = z.record(z.string(), z.unknown())
const operationSchema = z.object({
  operationId: z.string(),
  summary: z.string().min(5),
  'x-permission': z.string(),
  security: z.array(z.record(z.string(), z.array(z.string()))),
  parameters: z
    .array(z.object({ name: z.string(), in: z.enum(['path', 'query']), required: z.boolean(), schema }))
    .default([]),
  requestBody: z.object({ content: z.record(z.string(), z.object({ schema })) }).optional(),
  responses: z.record(z.string(), z.looseObject({})),
})
const documentSchema = z.object({
  openapi: z.literal('3.1.0'),
  info: z.object({ title: z.string(), version: z.string() }),
  paths: z.record(z.string(), z.record(z.string(), operationSchema)),
  components: z.object({ schemas: z.record(z.string(), schema) }).loose(),
})
/** As it is sent. */
const text = JSON.stringify(openApiDocument(PATHS))
const document = documentSchema.parse(JSON.parse(text))
const operations = Object.entries(document.paths).flatMap(([path, methods]) =>
  Object.entries(methods).map(([method, operation]) => ({ path, method, operation })),
)
const operationOf = (method: string, path: string) => {
  const found = operations.find((one) => one.method === method && one.path === `/api/v1${path}`)
  if (!found) throw new Error(`Not described: ${method} ${path}`)
  return found.operation
}

describe('the description for programs', () => {
  it('has every route and method there is, with its row of the permission table, and no other', async () => {
    const there = await Promise.all(
      files.map(async (file) => {
        const module: Record<string, unknown> = await import(file)
        const path = `/${relative(folder, file).replace(/\/route\.ts$/, '')}`.replace(/\[(\w+)\]/g, '{$1}')
        return METHODS.filter((method) => method in module).map((method) => {
          const handler = module[method]
          const permission =
            typeof handler === 'function' && 'permission' in handler ? handler.permission : null
          return `${method} /api/v1${path} ${permission}`
        })
      }),
    )
    const described = operations.map(
      ({ path, method, operation }) => `${method.toUpperCase()} ${path} ${operation['x-permission']}`,
    )
    expect(described.sort()).toEqual(there.flat().sort())
  })

  it('names each parameter of a path, and each operation differently', () => {
    for (const { path, operation } of operations) {
      const inPath = operation.parameters.filter((one) => one.in === 'path').map(({ name }) => name)
      expect(inPath.sort(), path).toEqual([...path.matchAll(/\{(\w+)\}/g)].map(([, name]) => name).sort())
    }
    const ids = operations.map(({ operation }) => operation.operationId)
    expect(new Set(ids).size).toBe(ids.length)
  })

  it('refers to nothing that is not in it, and says what each parameter is', () => {
    const refs = [...text.matchAll(/"\$ref":"#\/components\/(\w+)\/(\w+)"/g)]
    expect(refs.length).toBe([...text.matchAll(/"\$ref"/g)].length)
    const parts = z.record(z.string(), schema).parse(JSON.parse(text).components)
    for (const [ref, kind = '', name = ''] of refs)
      expect(Object.keys(parts[kind] ?? {}), ref).toContain(name)
    for (const { path, operation } of operations)
      for (const { name, schema } of operation.parameters)
        expect(Object.keys(schema), `${path} ${name}`).toEqual(
          expect.arrayContaining([expect.stringMatching(/^(type|anyOf)$/)]),
        )
  })

  it('says what a rehearsal is asked for with, and that only what is away must be said', () => {
    const { requestBody, responses, security } = operationOf('post', '/overlays/{slug}/rehearsals')
    expect(requestBody?.content['application/json']?.schema).toMatchObject({
      type: 'object',
      required: ['exclude'],
      properties: { exclude: { properties: { nodes: { type: 'array', items: { type: 'string' } } } } },
    })
    expect(responses).toMatchObject({
      201: { content: { 'application/json': { schema: { $ref: '#/components/schemas/Rehearsal' } } } },
      default: { $ref: '#/components/responses/Problem' },
    })
    expect(security).toEqual([{ token: [PERMISSIONS['rehearsal.start'].tokenScope] }, { session: [] }])
  })

  it('tells numbers and defaults of a query, streams and files', () => {
    expect(operationOf('get', '/overlays/{slug}/nodes').parameters).toContainEqual({
      name: 'limit',
      in: 'query',
      required: false,
      schema: { type: 'integer', minimum: 1, maximum: 1000, default: 500 },
    })
    expect(operationOf('get', '/overlays/{slug}/events').responses).toMatchObject({
      200: { content: { 'text/event-stream': {} } },
    })
    expect(operationOf('post', '/incidents/{number}/files').requestBody?.content).toHaveProperty(
      'application/octet-stream',
    )
    expect(operationOf('delete', '/overlays/{slug}/rules/{id}').responses).toHaveProperty('204')
  })

  it('may be read by everyone', () => expect(GET.permission).toBe('openapi.read'))
})
