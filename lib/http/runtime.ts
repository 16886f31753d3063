/** What the web process's requests work with: composition root. On globalThis, as bundles share no modules. */
import { pino } from 'pino'
import { SignInThrottle } from '@/lib/auth/throttle'
import { type EntityManager, getOrm } from '@/lib/db'
import type { ServerSetup } from './request-facts'

export interface Log {
  info(data: object, message: string): void
  warn(data: object, message: string): void
  error(data: object, message: string): void
}

export interface Runtime extends ServerSetup {
  forkEm(): Promise<EntityManager>
  throttle(): Promise<SignInThrottle>
  now(): Date
  log: Log
}

const key = Symbol.for('thinspan.runtime')
const store = globalThis as { [key]?: Runtime }

function compose(): Runtime {
  let throttle: Promise<SignInThrottle> | undefined
  return {
    forkEm: async () => (await getOrm()).em.fork(),
    throttle: () => {
      throttle ??= getOrm().then((orm) => new SignInThrottle(orm))
      return throttle
    },
    now: () => new Date(),
    log: pino({ name: 'thinspan-web', level: process.env.THINSPAN_LOG_LEVEL ?? 'info' }),
    address: process.env.THINSPAN_ADDRESS ?? null,
    trustedProxies: readCount(process.env.THINSPAN_TRUSTED_PROXIES),
  }
}

function readCount(text = ''): number {
  if (/^\d*$/.test(text)) return Number(text)
  throw new Error(`Set THINSPAN_TRUSTED_PROXIES to how many proxies stand in front; "${text}" is no number.`)
}

export function getRuntime(): Runtime {
  store[key] ??= compose()
  return store[key]
}

/** For tests: requests of this process work with `runtime` from now on. */
export function setRuntime(runtime: Runtime | undefined): void {
  store[key] = runtime
}
