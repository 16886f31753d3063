import { describe, expect, it } from 'vitest'
import type { Incident } from '@/lib/data/warn-dto'
import { formatBytes, incidentLine, incidentsSentence, isMuted } from '@/lib/face/incidents'

const ferrier = { id: 'f', name: 'S. Ferrier' }
const incident = (over: Partial<Incident> = {}): Incident => ({
  id: 'i',
  number: 12,
  overlay: { slug: 'tides', name: 'Tides' },
  team: { slug: 'harbourline', name: 'Harbourline' },
  severity: 'warning',
  state: 'open',
  sentence: 'few links left.',
  raisedAt: '2026-11-20T01:00:00.000Z',
  clearedAt: null,
  resolvedAt: null,
  holder: null,
  heldSince: null,
  mutedUntil: null,
  mutedBecause: null,
  inMaintenance: false,
  ...over,
})
const open = incident()
const held = incident({ state: 'held', holder: ferrier })
const cleared = incident({ state: 'cleared' })
const NOW = Date.parse('2026-11-20T01:14:30.000Z')

describe('the sentence over the incidents', () => {
  it.each<[Incident[], string]>([
    [[], 'No incident is open.'],
    [[open], '1 incident is open; nobody has it.'],
    [[held], '1 incident is open; somebody has it.'],
    [[open, held], '2 incidents are open; nobody has 1 of them.'],
    [[open, open], '2 incidents are open; nobody has any of them.'],
    [[held, held], '2 incidents are open; somebody has each of them.'],
    [[cleared], 'No incident is open. 1 incident has cleared and waits to be resolved.'],
    [
      [open, cleared, cleared],
      '1 incident is open; nobody has it. 2 incidents have cleared and wait to be resolved.',
    ],
  ])('counts what is open and who has it (%#)', (incidents, sentence) =>
    expect(incidentsSentence(incidents)).toBe(sentence),
  )
})

describe('the line on the first page of an overlay', () => {
  it.each<[Partial<Incident>, string]>([
    [{}, 'Incident 12, raised 14 min ago: few links left. Nobody has it yet.'],
    [
      { state: 'held', holder: ferrier },
      'Incident 12, raised 14 min ago: few links left. S. Ferrier has it.',
    ],
    [
      { state: 'cleared', holder: ferrier },
      'Incident 12, raised 14 min ago: few links left. It has cleared; S. Ferrier has it.',
    ],
    [
      { raisedAt: '2026-11-20T01:20:00.000Z' },
      'Incident 12, raised 0 s ago: few links left. Nobody has it yet.',
    ],
  ])('says what it is and who has it (%#)', (over, line) =>
    expect(incidentLine(incident(over), NOW)).toBe(line),
  )
})

it('an incident is muted until the moment named', () => {
  const mutedUntil = new Date(NOW).toISOString()
  expect([
    isMuted({ mutedUntil }, NOW - 1),
    isMuted({ mutedUntil }, NOW),
    isMuted({ mutedUntil: null }, NOW),
  ]).toEqual([true, false, false])
})

it('sizes are rounded up to what is read at a glance', () =>
  expect([formatBytes(28), formatBytes(1_001), formatBytes(5 * 1024 * 1024)]).toEqual([
    '28 B',
    '2 kB',
    '5.2 MB',
  ]))
