import { RateLimiterPostgres, RateLimiterRes } from 'rate-limiter-flexible'
import type { Orm } from '@/lib/db'
import { sha256Hex } from './secrets'

export const THROTTLE = {
  /** Attempts for one e-mail address, from wherever. */
  email: { attempts: 10, windowSeconds: 15 * 60 },
  /** Attempts from one network address, for whomever. */
  address: { attempts: 50, windowSeconds: 15 * 60 },
  /** Attempts from all network addresses that no proxy vouches for, together. */
  unknown: { attempts: 500, windowSeconds: 15 * 60 },
} as const
export type ThrottleKind = keyof typeof THROTTLE

export interface Attempt {
  email: string
  address: string | null
}

/** What an attempt counts against. Keys are hashed: the table need not know who tried. */
export function throttleKeys({ email, address }: Attempt): { kind: ThrottleKind; key: string }[] {
  return [
    { kind: 'email', key: sha256Hex(email.trim().toLowerCase()) },
    address ? { kind: 'address', key: sha256Hex(address) } : { kind: 'unknown', key: 'all' },
  ]
}

/** Counts sign-in attempts in the database, so that all processes count together. */
export class SignInThrottle {
  readonly #limiters: Record<ThrottleKind, RateLimiterPostgres>

  constructor(orm: Orm) {
    const limiter = (kind: ThrottleKind) =>
      new RateLimiterPostgres({
        storeClient: orm.em.getConnection().getKnex(),
        storeType: 'knex',
        tableName: 'rate_limits',
        tableCreated: true,
        keyPrefix: `sign-in-${kind}`,
        points: THROTTLE[kind].attempts,
        duration: THROTTLE[kind].windowSeconds,
      })
    this.#limiters = { email: limiter('email'), address: limiter('address'), unknown: limiter('unknown') }
  }

  /**
   * Counts the attempt before the password is looked at, on connections of the shared pool: whoever asks must
   * hold none, or callers would wait for each other for ever. Null: go on; else the seconds to wait.
   */
  async count(attempt: Attempt): Promise<number | null> {
    const waits = await Promise.all(
      throttleKeys(attempt).map(({ kind, key }) =>
        this.#limiters[kind].consume(key).then(
          () => null,
          (refusal: unknown) => {
            if (refusal instanceof RateLimiterRes) return Math.max(1, Math.ceil(refusal.msBeforeNext / 1000))
            throw refusal
          },
        ),
      ),
    )
    const longest = Math.max(0, ...waits.map((wait) => wait ?? 0))
    return longest === 0 ? null : longest
  }

  /** A success clears what was counted against the e-mail address; the network address keeps its count. As for `count`. */
  async clear(attempt: Attempt): Promise<void> {
    for (const { kind, key } of throttleKeys(attempt))
      if (kind === 'email') await this.#limiters.email.delete(key)
  }
}
