import { randomBytes } from 'node:crypto'
import { z } from 'zod'
import { runAdminCommand } from '@/lib/data/admin-commands'
import { nextProgram } from '@/scripts/lib/build.mjs'
import { TEST_DIST_FOLDER } from '@/scripts/lib/test-cluster.mjs'
import { untilHealthy } from '@/scripts/lib/web.mjs'
import { createTestDatabase, type TestDatabase } from '../database'
import { freePort } from '../free-port'
import { testRuntime } from '../people'
import { PATIENCE_MS } from '../until'
import { Child, ROOT } from './child'

/** From this level on a line of the log is a fault (pino's levels: 50 is error). */
const ERROR_LEVEL = 50

export interface E2eServer {
  url: string
  database: TestDatabase
  /** Lines of the log that tell of a fault of the server. */
  failures(): string[]
  /** Runs one admin command, such as ['token', 'create', …], on the server's database. */
  admin(words: readonly string[]): Promise<object>
  stop(): Promise<void>
}

/** The production build on a random port, with a database and a secret of its own; `env` is set for it too. */
export async function startServer({ env = {} }: { env?: Record<string, string> } = {}): Promise<E2eServer> {
  const database = await createTestDatabase()
  const port = await freePort()
  const url = `http://127.0.0.1:${port}`
  const args = [nextProgram(ROOT), 'start', '-H', '127.0.0.1', '-p', String(port)]
  const web = new Child(process.execPath, args, {
    env: {
      NODE_ENV: 'production',
      NEXT_TELEMETRY_DISABLED: '1',
      DATABASE_URL: database.url,
      THINSPAN_DIST_DIR: TEST_DIST_FOLDER,
      THINSPAN_SECRET: randomBytes(32).toString('base64url'),
      THINSPAN_URL: url,
      ...env,
    },
  })
  const stop = async () => {
    await web.stop()
    await database.close()
  }
  try {
    const { signal } = new AbortController()
    const ended = () => web.ended
    await untilHealthy(`${url}/api/health`, { ended, patienceMs: PATIENCE_MS, signal })
  } catch (error) {
    await stop()
    throw new Error(`${error instanceof Error ? error.message : String(error)}\n${web.tail()}`)
  }
  const runtime = testRuntime(database, () => new Date())
  return {
    url,
    database,
    failures: () => web.lines.filter(isFailure),
    admin: (words) => runAdminCommand(runtime, words),
    stop,
  }
}

export const OWNER = {
  email: 'ines@harbourline.example',
  name: 'Ines Marrow',
  password: 'tide tables at noon',
  team: 'Harbourline',
}

export async function createOwner({ admin }: E2eServer): Promise<void> {
  const flags = Object.entries({ ...OWNER, role: 'owner' }).flatMap(([key, value]) => [`--${key}`, value])
  await admin(['user', 'create', ...flags])
}

/** Of the owner. */
export async function createToken({ admin }: E2eServer, scope: 'read' | 'write'): Promise<string> {
  const created = await admin(['token', 'create', '--email', OWNER.email, '--scope', scope])
  return z.object({ token: z.string() }).parse(created).token
}

const logLineSchema = z.looseObject({ level: z.number() })

/** pino writes JSON; Next marks what it could not handle with a cross. */
function isFailure(line: string): boolean {
  if (/^\s*⨯/.test(line)) return true
  try {
    return logLineSchema.parse(JSON.parse(line)).level >= ERROR_LEVEL
  } catch {
    return false
  }
}
