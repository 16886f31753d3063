import { randomBytes } from 'node:crypto'
import { beforeEach, describe, expect, test } from 'vitest'
import { enrol, type KeyChange } from '@/agent'
import { KEY_RETRIES, KEY_RETRY_MS, OwnKeys, type OwnKeysInit } from '@/agent/trust/own-keys'
import { createRandom } from '@/lib/method/random'
import { generateKeys, type KeyPair } from '@/lib/protocol'
import { FakeClock } from '../../../support/fake-clock'
import { during } from '../../../support/memory-swarm'
import { TestCollector } from '../../../support/test-collector'

const never = new AbortController().signal
let clock: FakeClock
let collector: TestCollector
let keys: KeyPair
let changes: KeyChange[]

beforeEach(async () => {
  clock = new FakeClock({ epochMs: Date.UTC(2031, 4, 6, 12) })
  collector = new TestCollector({ clock, random: createRandom('keys') })
  keys = generateKeys()
  changes = []
  const joining = { code: collector.code, name: 'tar-01', labels: {}, address: null, version: '0.0.0-test' }
  expect(await enrol({ collector, keys }, joining, never)).toMatchObject({ ok: true })
})

const ownKeys = (over: Partial<OwnKeysInit> = {}) =>
  new OwnKeys(
    { collector, clock, randomBytes, nowMs: () => clock.epochMs() },
    { agentId: 'agent-tar-01', keys, onKey: (change) => void changes.push(change), ...over },
  )
const rotate = (own: OwnKeys) => during(clock, own.rotate(never))
const inForce = () => collector.agents.get('agent-tar-01')!.key

describe('a new key of one’s own', () => {
  test('is kept before the collector hears of it, and in force once that has taken it', async () => {
    const heldWhenKept: string[] = []
    const own = ownKeys({
      onKey: (change) => {
        changes.push(change)
        heldWhenKept.push(inForce())
      },
    })
    expect(await rotate(own)).toMatchObject({ ok: true, grant: { pass: expect.any(String) } })
    expect(own.current.publicKey).toBe(inForce())
    expect(own.current.publicKey).not.toBe(keys.publicKey)
    expect(changes.map(({ state, keys }) => [state, keys.publicKey])).toEqual([
      ['pending', inForce()],
      ['in-force', inForce()],
    ])
    expect(heldWhenKept).toEqual([keys.publicKey, inForce()])
  })

  test('whose answer was lost is asked for again, the same', async () => {
    let losses = 2
    collector.loses = () => losses-- > 0
    expect(await rotate(ownKeys())).toMatchObject({ ok: true })
    expect(changes.map(({ state }) => state)).toEqual(['pending', 'in-force'])
    expect(changes[0]!.keys.publicKey).toBe(inForce())
  })

  test('stays pending where no answer comes, and a later start finishes it', async () => {
    collector.loses = () => true
    const own = ownKeys()
    const before = clock.monotonicMs()
    expect(await rotate(own)).toMatchObject({ ok: false, error: { code: 'unanswered' } })
    expect(clock.monotonicMs() - before).toBeGreaterThanOrEqual(KEY_RETRIES * KEY_RETRY_MS)
    expect(own.isUnfinished).toBe(true)
    expect(own.current).toBe(keys)
    // The collector took it all the same.
    expect(inForce()).not.toBe(keys.publicKey)
    collector.loses = () => false
    const restarted = ownKeys({ pending: changes[0]!.keys })
    expect(await rotate(restarted)).toMatchObject({ ok: true })
    expect(restarted.current.publicKey).toBe(inForce())
    expect(restarted.isUnfinished).toBe(false)
  })

  test('is not asked for where it cannot be kept', async () => {
    const own = ownKeys({ onKey: () => Promise.reject(new Error('ENOSPC')) })
    expect(await rotate(own)).toEqual({ ok: false, error: { code: 'not-kept', reason: 'ENOSPC' } })
    expect(inForce()).toBe(keys.publicKey)
    expect(own.isUnfinished).toBe(false)
  })

  test('that the collector does not take is let go', async () => {
    const own = ownKeys({ keys: generateKeys() })
    expect(await rotate(own)).toMatchObject({ ok: false, error: { code: 'not-taken' } })
    expect(own.isUnfinished).toBe(false)
    expect(inForce()).toBe(keys.publicKey)
  })

  test('asked for twice at once is one', async () => {
    const own = ownKeys()
    const results = await during(clock, Promise.all([own.rotate(never), own.rotate(never)]))
    expect(results[0]).toBe(results[1])
    expect(changes.filter(({ state }) => state === 'pending')).toHaveLength(1)
  })
})
