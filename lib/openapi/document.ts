import { SESSION_COOKIE } from '@/lib/auth/cookie'
import { permissionOf } from '@/lib/auth/permissions'
import { PROBLEM_MEDIA_TYPE } from '@/lib/http/problem'
import { answerShapes, askedShape, type JsonSchema, parameterShapes, refTo } from './shapes'
import type { PathRow } from './types'

const BASE = '/api/v1'
/** Of the interface, not of the program. */
const VERSION = '1'
const ANYTHING: JsonSchema = { type: 'string', format: 'binary' }
const PROBLEM = { $ref: '#/components/responses/Problem' }

/** An OpenAPI 3.1.0 document (spec.openapis.org/oas/v3.1.0) of the interface for programs. */
export function openApiDocument(rows: readonly PathRow[]): JsonSchema {
  return {
    openapi: '3.1.0',
    info: {
      title: 'Thinspan',
      version: VERSION,
      description:
        'How near an overlay is to coming apart, where, and what would be left of it. Send a bearer token of a team, or the session cookie of a person. Errors are RFC 9457 problem details that say what to do next.',
    },
    servers: [{ url: '/' }],
    paths: Object.fromEntries(
      rows.map((row) => [
        `${BASE}${row.path}`,
        Object.fromEntries(row.methods.map((one) => [one.method.toLowerCase(), operation(row.path, one)])),
      ]),
    ),
    components: {
      schemas: answerShapes(),
      responses: {
        Problem: {
          description:
            'It was refused or failed; `detail` says what to do next, `retry` whether to ask again.',
          content: { [PROBLEM_MEDIA_TYPE]: { schema: refTo('Problem') } },
        },
      },
      securitySchemes: {
        token: {
          type: 'http',
          scheme: 'bearer',
          description: 'Made with `admin token create`; acts for its team.',
        },
        session: { type: 'apiKey', in: 'cookie', name: SESSION_COOKIE },
      },
    },
  }
}

function operation(path: string, { method, handler, does, answers, streams }: PathRow['methods'][number]) {
  const { permission, spec } = handler
  const { who, role, tokenScope, audit } = permissionOf(permission)
  const parameters = [
    ...(spec.params
      ? parameterShapes(spec.params).map((one) => ({ ...one, in: 'path', required: true }))
      : []),
    ...(spec.query ? parameterShapes(spec.query).map((one) => ({ ...one, in: 'query' })) : []),
  ]
  const status = answers === null ? 204 : (spec.status ?? 200)
  const body = spec.raw ? ANYTHING : spec.body && askedShape(spec.body)
  return {
    operationId: operationId(method, path),
    summary: does,
    description: allowed(role, audit),
    'x-permission': permission,
    'x-role': role,
    security:
      who === 'anyone' ? [] : [...(tokenScope === null ? [] : [{ token: [tokenScope] }]), { session: [] }],
    ...(parameters.length > 0 ? { parameters } : {}),
    ...(body
      ? {
          requestBody: {
            required: true,
            content: { [spec.raw ? 'application/octet-stream' : 'application/json']: { schema: body } },
          },
        }
      : {}),
    responses: {
      [status]: {
        description: answers === null ? 'Done.' : does,
        ...(answers === null
          ? {}
          : {
              content: {
                'application/json': { schema: refTo(answers) },
                ...(streams ? { 'text/event-stream': { schema: { type: 'string' } } } : {}),
              },
            }),
      },
      default: PROBLEM,
    },
  }
}

/** "get-overlays-slug-rehearsals": stays the same for as long as the path does. */
function operationId(method: string, path: string): string {
  const words = path.split('/').map((part) => part.replace(/[{}]/g, ''))
  return [method.toLowerCase(), ...words].filter(Boolean).join('-')
}

function allowed(role: string | null, audit: boolean): string {
  const who =
    role === null ? 'For everyone who is signed in.' : `For ${ROLE_WORDS[role] ?? role} of the team.`
  return audit ? `${who} Leaves an entry in the audit log.` : who
}

const ROLE_WORDS: Readonly<Record<string, string>> = {
  viewer: 'every member',
  operator: 'operators and owners',
  owner: 'owners',
}
