import { describe, expect, it } from 'vitest'
import { findChromium } from '@/scripts/lib/chromium.mjs'
import { formatSignIns, parseDemoLine } from '@/scripts/lib/demo-lines.mjs'
import { memorySentence, parseMeminfo, roomInGroup } from '@/scripts/lib/memory.mjs'
import { describeMigrations } from '@/scripts/lib/migrations.mjs'
import { requireNode } from '@/scripts/lib/node-version.mjs'
import { parsePort } from '@/scripts/lib/ports.mjs'
import { completeSecrets } from '@/scripts/lib/secrets.mjs'
import { createSteps, formatDuration } from '@/scripts/lib/steps.mjs'
import { countResults, verdict } from '@/scripts/lib/vitest-report.mjs'
import { addressesOf } from '@/scripts/lib/web.mjs'

describe('what a start checks first', () => {
  it('takes a new enough Node and says which is wanted', () => {
    for (const version of ['20.12.0', '20.20.2', '24.0.1']) expect(() => requireNode(version)).not.toThrow()
    for (const version of ['20.11.1', '18.19.0', 'x'])
      expect(() => requireNode(version)).toThrow('needs Node 20.12')
  })
  it('reads a port, and says what is wrong with another text', () => {
    expect(parsePort(undefined, 3000)).toBe(3000)
    expect(parsePort('8080', 3000)).toBe(8080)
    for (const text of ['0', '65536', '80a', '1.5'])
      expect(() => parsePort(text, 3000)).toThrow(`PORT is "${text}"`)
  })
  it('warns when a build may not fit into memory', () => {
    expect(parseMeminfo('MemTotal: 9 kB\nMemAvailable:  1000000 kB\nSwapFree: 24 kB\n')).toBe(1000024 * 1024)
    expect(parseMeminfo('')).toBeNull()
    expect(roomInGroup({ max: 'max', current: '5', stat: '' })).toBe(Number.POSITIVE_INFINITY)
    expect(roomInGroup({ max: '1000', current: '900', stat: 'anon 1\ninactive_file 300\n' })).toBe(400)
    expect(memorySentence(0.8e9)).toContain('Only 0.8 GB of memory is free and a build takes about 1.5 GB')
    expect(memorySentence(2e9)).toBeNull()
    expect(memorySentence(null)).toBeNull()
  })
  it('finds the browser, and does not pass over a wrong wish', () => {
    expect(findChromium({}, (path: string) => path === '/usr/bin/chromium')).toBe('/usr/bin/chromium')
    expect(findChromium({}, () => false)).toBeNull()
    expect(() => findChromium({ CHROMIUM_PATH: '/opt/x' }, () => false)).toThrow('CHROMIUM_PATH is /opt/x')
  })
  it('listens where asked and shows an address that can be opened', () => {
    const local = 'http://127.0.0.1:3000'
    expect(addressesOf('127.0.0.1', 3000)).toEqual({ local, shown: 'http://localhost:3000' })
    expect(addressesOf('0.0.0.0', 3000)).toEqual({ local, shown: 'http://localhost:3000' })
    expect(addressesOf('::', 3000)).toEqual({ local: 'http://[::1]:3000', shown: 'http://localhost:3000' })
    expect(addressesOf('10.1.2.3', 80)).toEqual({ local: 'http://10.1.2.3:80', shown: 'http://10.1.2.3:80' })
  })
})

describe('secrets', () => {
  const make = () => 'made'
  it('are made once and kept', () => {
    const first = completeSecrets(null, make)
    expect(first).toEqual({ secrets: { serverSecret: 'made', databasePassword: 'made' }, changed: true })
    expect(completeSecrets(JSON.stringify(first.secrets), () => 'other')).toEqual({
      ...first,
      changed: false,
    })
  })
  it('are completed where one is missing', () => {
    expect(completeSecrets('{"serverSecret":"kept"}', make)).toEqual({
      secrets: { serverSecret: 'kept', databasePassword: 'made' },
      changed: true,
    })
  })
  it.each(['{', 'null', '3'])('are never overwritten when the file is damaged (%s)', (text) => {
    expect(() => completeSecrets(text, make)).toThrow('secrets.json is damaged')
  })
})

describe('demo lines', () => {
  it('become sign-ins, readiness, notes; all else is for the log', () => {
    const signIn = { email: 'mira@harbourline.example', password: 'p', role: 'owner' }
    expect(parseDemoLine(JSON.stringify({ signIn }))).toEqual({ kind: 'signIn', ...signIn })
    expect(parseDemoLine('{"ready":true}')).toEqual({ kind: 'ready' })
    expect(parseDemoLine('{"note":"History is simulated."}')).toEqual({
      kind: 'note',
      text: 'History is simulated.',
    })
    for (const line of ['', 'null', '{"signIn":{}}', 'listening'])
      expect(parseDemoLine(line)).toEqual({ kind: 'log', line })
  })
  it('are shown in columns', () => {
    const short = { email: 'a@b', password: 'secret', role: 'owner' }
    const long = { email: 'long@b', password: 'p', role: '' }
    expect(formatSignIns([short, long])).toEqual(['a@b     secret  owner', 'long@b  p'])
  })
})

describe('migrations', () => {
  it('are counted from the last line, whatever was logged before it', () => {
    expect(describeMigrations('a warning\n{"applied":["a","b"]}\n')).toBe('applied 2')
    expect(describeMigrations('{"applied":[]}')).toBeNull()
    expect(() => describeMigrations('{}')).toThrow('no list of migrations')
  })
})

describe('steps', () => {
  it('tell what was done and how long it took, and nothing when there was nothing to do', async () => {
    let now = 0
    let told = ''
    const { step } = createSteps({ nowMs: () => now, write: (text: string) => (told += text) })
    await step('Packages', async () => null)
    await step('Database', async () => {
      now += 830
      return 'started'
    })
    const broken = step('Build', async () => {
      now += 61_000
      throw new Error('no')
    })
    await expect(broken).rejects.toThrow('no')
    expect(told).toBe('✓ Database: started (0.8 s)\n✗ Build (1 min 1 s)\n')
  })
  it('never round to sixty seconds', () => {
    expect([59_949, 59_950, 119_999].map(formatDuration)).toEqual(['59.9 s', '1 min 0 s', '2 min 0 s'])
  })
})

describe('the last line', () => {
  const test = (status: string) => ({ status })
  it('counts tests, and a file that could not be run as one failure', () => {
    const ran = { status: 'failed', assertionResults: [test('passed'), test('failed'), test('skipped')] }
    const broken = { status: 'failed', assertionResults: [] }
    expect(countResults({ testResults: [ran, broken] })).toEqual({ passed: 1, failed: 2 })
    expect(countResults(null)).toEqual({ passed: 0, failed: 0 })
  })
  const cases = [
    ['all passed', { passed: 9, failed: 0 }, 0, [], { line: '9 passed, 0 failed', exitCode: 0 }],
    ['a test failed', { passed: 8, failed: 1 }, 1, [], { line: '8 passed, 1 failed', exitCode: 1 }],
    [
      'the run broke without a failed test',
      { passed: 9, failed: 0 },
      1,
      [],
      { line: '9 passed, 1 failed', exitCode: 1 },
    ],
    ['a check failed', { passed: 9, failed: 0 }, 0, ['Types'], { line: '9 passed, 1 failed', exitCode: 1 }],
    ['nothing ran', { passed: 0, failed: 0 }, 0, [], { line: '0 passed, 0 failed', exitCode: 1 }],
  ] as const
  it.each(cases)('is honest when %s', (_, counts, exitCode, failedSteps, expected) => {
    expect(verdict({ counts, exitCode, failedSteps })).toEqual(expected)
  })
})
