import { request } from 'node:http'
import { describe, expect, test } from 'vitest'
import { silentLogger } from '@/agent'
import type { AgentStatus } from '@/agent/agent-contract'
import type { SpawnProgram } from '@/agent/sources'
import {
  isLoopback,
  judge,
  metricsText,
  ServiceNotice,
  TickWatch,
  type WatchFacts,
  WatchServer,
} from '@/agent/watch'
import { FakeClock } from '../../support/fake-clock'

const status: AgentStatus = {
  agentId: 'agent-tar-01',
  incarnation: 'abc',
  address: 'ws://127.0.0.1:7946',
  ordersSequence: 7,
  frozen: false,
  clockSkewMs: -120,
  reports: {
    delivered: 40,
    failed: 2,
    lastDeliveredMsAgo: 1500,
    lastTookMs: 31,
    lastError: null,
    relayed: 1,
    lastRelayedMsAgo: null,
  },
  distance: 0,
  away: { isAway: false, entries: 0, error: null },
  keyRing: 1,
  linkKind: 'path',
  source: { kind: 'file', error: 'gone' },
  upgrade: null,
  ended: null,
  ticks: { count: 500, late: 3 },
  links: [
    {
      peer: 'agent-gul-04',
      name: 'gul-04',
      address: 'ws://gul-04:7946/',
      state: 'open',
      up: true,
      connections: 1,
      role: 'dialer',
      heardMsAgo: 3,
      weight: 1,
      version: 2,
    },
    {
      peer: null,
      name: null,
      address: 'ws://pin-02:7946/',
      state: 'unknown',
      up: false,
      connections: 0,
      role: null,
      heardMsAgo: null,
      weight: 0,
      version: null,
    },
  ],
}
const facts = (over: Partial<AgentStatus> = {}, more: Partial<WatchFacts> = {}): WatchFacts => ({
  status: { ...status, ...over },
  version: '0.1.0',
  uptimeSeconds: 3_600,
  intervalMs: 2_000,
  withoutAgent: 1,
  residentBytes: 61_000_000,
  ...more,
})
const reports = (over: Partial<AgentStatus['reports']>) => ({ reports: { ...status.reports, ...over } })

describe('the text of /metrics', () => {
  const text = metricsText(facts(), true)
  test('is OpenMetrics: families described once, counters ending in _total, units at the end of names, # EOF last', () => {
    const lines = text.split('\n')
    expect(lines.slice(-2)).toEqual(['# EOF', ''])
    const types = lines.filter((line) => line.startsWith('# TYPE ')).map((line) => line.split(' '))
    expect(new Set(types.map(([, , name]) => name)).size).toBe(types.length)
    for (const [, , name, type] of types) {
      const suffix = { counter: '_total', info: '_info', gauge: '' }[type!]
      const samples = lines.filter(
        (line) => line.startsWith(`${name}${suffix}{`) || line.startsWith(`${name}${suffix} `),
      )
      expect(samples.length, name).toBeGreaterThan(0)
      const unit = lines.find((line) => line.startsWith(`# UNIT ${name} `))?.split(' ')[3]
      if (unit) expect(name!.endsWith(`_${unit}`)).toBe(true)
    }
    const samples = lines.filter((line) => line !== '' && !line.startsWith('#'))
    for (const line of samples) expect(line).toMatch(/^[a-z_]+(\{[a-z]+="[^"\\\n]*"\})? -?\d+(\.\d+)?$/)
  })
  test('says links by state, ages in seconds, and nothing of who the neighbours are', () => {
    expect(text).toContain('thinspan_agent_links{state="up"} 1\nthinspan_agent_links{state="down"} 1\n')
    expect(text).toContain('# UNIT thinspan_agent_report_age_seconds seconds\n')
    expect(text).toContain('thinspan_agent_report_age_seconds 1.5\n')
    expect(text).toContain('thinspan_agent_clock_skew_seconds -0.12\n')
    expect(text).toContain('thinspan_agent_reports_total{outcome="delivered"} 40\n')
    expect(text).not.toMatch(/gul-04|pin-02|agent-tar/)
  })
  test('leaves a sample out that there is none of', () => {
    expect(metricsText(facts(reports({ lastDeliveredMsAgo: null })), true)).not.toMatch(
      /^thinspan_agent_report_age_seconds/m,
    )
  })
})

describe('health', () => {
  const cases: [string, WatchFacts, number, RegExp | null][] = [
    ['is good while reports get through', facts(), 100, null],
    [
      'is good while neighbours bring the reports',
      facts(reports({ lastDeliveredMsAgo: 90_000, lastRelayedMsAgo: 900 })),
      100,
      null,
    ],
    [
      'is good at the start, before the first report',
      facts({ ...reports({ lastDeliveredMsAgo: null }), frozen: true }, { uptimeSeconds: 5 }),
      100,
      null,
    ],
    [
      'is bad once no report gets through, and says why',
      facts(reports({ lastDeliveredMsAgo: 31_000, lastError: 'it is away' })),
      100,
      /31 s: it is away/,
    ],
    ['is bad while the loop stands still', facts(), 11_000, /No tick for 11 s/],
    ['is bad without orders', facts({ frozen: true }), 100, /no fresh orders/],
    ['is bad without a single link', facts({ links: status.links.slice(1) }), 100, /No link is up/],
    [
      'is bad once the agent has ended',
      facts({ ended: { reason: 'revoked', detail: 'revoked by ines' } }),
      100,
      /revoked by ines/,
    ],
  ]
  test.each(cases)('%s', (_, given, tickAgeMs, reason) => {
    const verdict = judge(given, { tickAgeMs })
    expect(verdict.ok).toBe(reason === null)
    if (reason) expect(verdict.reasons.join(' ')).toMatch(reason)
  })
})

describe('the metrics port', () => {
  const ask = (port: number, path: string, headers: Record<string, string> = {}, method = 'GET') =>
    new Promise<{ status: number; text: string; type: string }>((resolve, reject) => {
      const asked = request({ host: '127.0.0.1', port, path, headers, method }, (response) => {
        let text = ''
        response.on('data', (chunk) => {
          text += chunk
        })
        response.on('end', () =>
          resolve({ status: response.statusCode ?? 0, text, type: response.headers['content-type'] ?? '' }),
        )
      })
      asked.on('error', reject)
      asked.end()
    })

  test('serves metrics, health and status to this machine, and ends when told to', async () => {
    let age = 0
    const server = new WatchServer(
      { facts: () => facts(), tickAgeMs: () => age },
      { host: '127.0.0.1', port: 0, anywhere: false },
    )
    const port = await server.start()
    const metrics = await ask(port, '/metrics')
    expect(metrics.type).toBe('application/openmetrics-text; version=1.0.0; charset=utf-8')
    expect(metrics.text).toContain('thinspan_agent_healthy 1\n')
    expect(await ask(port, '/health')).toMatchObject({ status: 200, text: '{"ok":true,"reasons":[]}\n' })
    age = 60_000
    expect((await ask(port, '/health')).status).toBe(503)
    expect(JSON.parse((await ask(port, '/status')).text)).toMatchObject({
      version: '0.1.0',
      source: { withoutAgent: 1 },
    })
    expect((await ask(port, '/elsewhere')).status).toBe(404)
    expect((await ask(port, '/metrics', {}, 'POST')).status).toBe(405)
    expect((await ask(port, '/status', { host: 'rebound.example' })).status).toBe(403)
    await server.stop()
    await expect(ask(port, '/health')).rejects.toThrow()
  })

  test.each(['0.0.0.0', '::', '192.0.2.7', 'tar-01.harbourline.example'])(
    'refuses %s unless told so',
    async (host) => {
      const server = new WatchServer({ facts, tickAgeMs: () => 0 }, { host, port: 0, anywhere: false })
      await expect(server.start()).rejects.toThrow('--metrics-anywhere')
    },
  )
  test('takes every address when told so', async () => {
    const server = new WatchServer(
      { facts: () => facts(), tickAgeMs: () => 0 },
      { host: '0.0.0.0', port: 0, anywhere: true },
    )
    const port = await server.start()
    expect((await ask(port, '/health', { host: 'tar-01.harbourline.example' })).status).toBe(200)
    await server.stop()
  })
  test('knows loopback', () => {
    expect(['127.0.0.1', '127.8.8.8', '::1', 'localhost'].every(isLoopback)).toBe(true)
  })
})

describe('the service manager', () => {
  test('is told ready at once, of life at half its time while ticks come, no more when they stop, and of the stop', async () => {
    const clock = new FakeClock()
    const told: string[] = []
    const runProgram: SpawnProgram = async ([program, message = '']) => {
      expect(program).toBe('systemd-notify')
      told.push(message)
      return { ok: true, output: '' }
    }
    let count = 0
    const watch = new TickWatch({ clock, ticks: () => count })
    const notice = new ServiceNotice(
      { runProgram, clock, logger: silentLogger, tickAgeMs: () => watch.ageMs() },
      { watchdogMs: 30_000 },
    )
    notice.start()
    await clock.advance(1)
    expect(told).toEqual(['READY=1', 'WATCHDOG=1'])
    for (let second = 0; second < 30; second++) {
      count += 1
      await clock.advance(1_000)
    }
    expect(told.splice(0)).toEqual(['READY=1', 'WATCHDOG=1', 'WATCHDOG=1', 'WATCHDOG=1'])
    // One more look still sees the last ticks; from then on the loop stands.
    await clock.advance(15_000)
    told.splice(0)
    await clock.advance(60_000)
    expect(told).toEqual([])
    await notice.stop()
    expect(told).toEqual(['STOPPING=1'])
  })

  test('is told once, and warned of once, where its program is missing', async () => {
    const clock = new FakeClock()
    const warnings: string[] = []
    const runProgram: SpawnProgram = async () => ({ ok: false, reason: 'ENOENT' })
    const logger = { ...silentLogger, warn: (_: object, message: string) => warnings.push(message) }
    const notice = new ServiceNotice(
      { runProgram, clock, logger, tickAgeMs: () => 0 },
      { watchdogMs: 10_000 },
    )
    notice.start()
    await clock.advance(60_000)
    await notice.stop()
    expect(warnings).toEqual([expect.stringContaining('systemd-notify')])
  })
})
