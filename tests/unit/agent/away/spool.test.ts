import { chmod, mkdtemp, readdir, readFile, rm, stat, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, test } from 'vitest'
import type { Logger } from '@/agent'
import { AWAY_FACTS_MS, SPOOL_WRITE_MS, Spool } from '@/agent/away/spool'
import { createSpoolFile, type SpoolStore } from '@/agent/away/spool-store'
import { FakeClock } from '../../../support/fake-clock'

const links = { live: 4, known: 4 }
let clock: FakeClock
let warnings: string[]
beforeEach(() => {
  clock = new FakeClock({ epochMs: Date.UTC(2031, 4, 6, 12) })
  warnings = []
})

function spoolOn(store?: SpoolStore, mayName = true): Spool {
  const logger: Logger = { debug() {}, info() {}, error() {}, warn: (_, message) => warnings.push(message) }
  return new Spool(
    { clock, logger, store, nowMs: () => clock.epochMs() },
    { links: () => links, mayName: () => mayName },
  )
}

test('nothing is kept while reports get through', () => {
  const spool = spoolOn()
  spool.note(false)
  spool.noteLink('link-down', 'agent-gul-04')
  expect(spool.summary()).toEqual([])
})

test('while nothing does, the links’ state once a minute and every link that goes or comes', async () => {
  const spool = spoolOn()
  spool.note(true)
  await clock.advance(AWAY_FACTS_MS / 2)
  spool.note(true)
  expect(spool.count).toBe(1)
  await clock.advance(AWAY_FACTS_MS / 2)
  spool.note(true)
  spool.noteLink('link-down', 'agent-gul-04')
  expect(spool.count).toBe(3)
  expect(spool.summary()).toEqual([
    {
      fromAt: '2031-05-06T12:00:00.000Z',
      toAt: '2031-05-06T12:01:00.000Z',
      leastLive: 4,
      known: 4,
      linkDowns: 1,
    },
  ])
  spool.note(false)
  spool.clear()
  expect(spool.summary()).toEqual([])
})

describe('beside the configuration', () => {
  let folder: string
  let path: string
  beforeEach(async () => {
    folder = await mkdtemp(join(tmpdir(), 'spool-'))
    path = join(folder, 'away.jsonl')
  })
  afterEach(() => rm(folder, { recursive: true, force: true }))

  test('it outlives the program, for its owner alone, and goes once it was told', async () => {
    const first = spoolOn(createSpoolFile(path))
    await first.load()
    first.note(true)
    first.noteLink('link-down', 'agent-gul-04')
    await first.stop()
    expect((await stat(path)).mode & 0o777).toBe(0o600)
    const second = spoolOn(createSpoolFile(path))
    await second.load()
    expect(second.summary()).toMatchObject([{ leastLive: 4, linkDowns: 1 }])
    second.clear()
    await second.stop()
    expect(await readdir(folder)).toEqual([])
  })

  test('names no neighbour where the overlay names no links', async () => {
    const spool = spoolOn(createSpoolFile(path), false)
    spool.note(true)
    spool.noteLink('link-down', 'agent-gul-04')
    await spool.stop()
    expect(await readFile(path, 'utf8')).not.toContain('gul-04')
    expect((await readFile(path, 'utf8')).split('\n')).toHaveLength(3)
  })

  test('it is written seldom, however often links flap', async () => {
    let writes = 0
    const file = createSpoolFile(path)
    const spool = spoolOn({
      ...file,
      write: (text) => {
        writes += 1
        return file.write(text)
      },
    })
    for (let at = 0; at < 600; at++) {
      spool.noteLink(at % 2 ? 'link-up' : 'link-down', 'agent-gul-04')
      spool.note(true)
      await clock.advance(50)
    }
    await spool.stop()
    expect(writes).toBeLessThanOrEqual(30_000 / SPOOL_WRITE_MS + 1)
    expect(spool.count).toBe(500)
  })

  test('a full disk is said once, stops nothing, and is forgotten once there is room', async () => {
    let isFull = true
    const file = createSpoolFile(path)
    const spool = spoolOn({
      ...file,
      write: (text) => (isFull ? Promise.reject(new Error('ENOSPC: no space left')) : file.write(text)),
    })
    const later = async () => {
      spool.noteLink('link-down', 'agent-gul-04')
      await clock.advance(SPOOL_WRITE_MS)
      spool.note(true)
      await clock.advance(0)
    }
    spool.note(true)
    for (let at = 0; at < 5; at++) await later()
    expect(warnings).toEqual(['what happens while the collector is away is not kept on disk'])
    expect(spool.error).toBe('the spool cannot be kept: ENOSPC: no space left')
    expect(spool.summary()).toMatchObject([{ linkDowns: 5 }])
    isFull = false
    await later()
    await spool.stop()
    expect(spool.error).toBeNull()
  })

  test('a folder that is none is noticed as well', async () => {
    await writeFile(path, '')
    const spool = spoolOn(createSpoolFile(join(path, 'away.jsonl')))
    await spool.load()
    spool.note(true)
    await spool.stop()
    expect(spool.error).toContain('the spool cannot be kept')
    expect(warnings).toHaveLength(1)
  })

  test.skipIf(process.getuid?.() === 0)('so is one that may only be read', async () => {
    await chmod(folder, 0o500)
    const spool = spoolOn(createSpoolFile(path))
    spool.note(true)
    await spool.stop()
    await chmod(folder, 0o700)
    expect(spool.error).toContain('EACCES')
  })
})
