import type { OverlayLink, OverlayNode } from '@/lib/data/dto'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import type { MaintenanceWindowDto } from '@/lib/data/rules-dto'
import { NOTHING } from '@/lib/face/rehearsal'

export const NOW = Date.parse('2031-03-12T20:00:00.000Z')
export const minutesAway = (minutes: number): string => new Date(NOW + minutes * 60_000).toISOString()

export function node(name: string, office: string, state: OverlayNode['state'] = 'heard'): OverlayNode {
  return {
    name,
    labels: { office },
    side: null,
    value: null,
    degree: 3,
    weightedDegree: 3,
    heardAt: null,
    version: null,
    state,
  }
}

/** Twelve that have joined, one of them unheard, and one that left. */
export const nodes: OverlayNode[] = [
  ...['tar-01', 'tar-02', 'tar-03', 'tar-04', 'tar-05', 'tar-06'].map((name) => node(name, 'Tarnwick')),
  ...['eel-01', 'eel-02', 'eel-03', 'eel-04'].map((name) => node(name, 'Eelholm')),
  node('pin-01', 'Pinnet Bay'),
  node('pin-02', 'Pinnet Bay', 'unheard'),
  node('tar-99', 'Tarnwick', 'left'),
]

export const link = (a: string, b: string, state: OverlayLink['state'] = 'live'): OverlayLink => ({
  a,
  b,
  weight: 1,
  share: null,
  crossing: false,
  state,
  heardAt: '2031-03-12T20:00:00.000Z',
})

export const links = [link('eel-01', 'tar-01'), link('eel-02', 'tar-02'), link('tar-01', 'tar-02', 'lost')]

export const rehearsal = (over: Partial<RehearsalDto> = {}): RehearsalDto => ({
  id: 'r',
  state: 'done',
  progress: 1,
  endsInMs: null,
  askedAt: minutesAway(-5),
  startsAt: null,
  startedAt: minutesAway(-5),
  endedAt: minutesAway(-4),
  by: 'Ines Marrow',
  note: null,
  incident: null,
  exclude: { ...NOTHING, nodes: ['tar-01', 'tar-02'] },
  taken: 2,
  remain: 10,
  reading: { lambda2: 0.8423, low: 0.831, high: 0.8559 },
  level: 'firm',
  sides: [
    { name: 'a', nodes: 6 },
    { name: 'b', nodes: 4 },
  ],
  crossingLinks: 5,
  live: { lambda2: 1.2, low: 1.1901, high: 1.2109 },
  floor: { lambda2: 0.6, because: 'the rule "floor"' },
  answer: 'holds',
  verdict: 'It holds.',
  waves: null,
  ...over,
})

export const window = (
  id: string,
  startsIn: number,
  over: Partial<MaintenanceWindowDto> = {},
): MaintenanceWindowDto => ({
  id,
  label: { key: 'office', value: 'Eelholm' },
  reason: `work ${id}`,
  startsAt: minutesAway(startsIn),
  endsAt: minutesAway(startsIn + 60),
  repeats: null,
  createdBy: null,
  endedAt: null,
  state: 'to come',
  next: [{ startsAt: minutesAway(startsIn), endsAt: minutesAway(startsIn + 60) }],
  ...over,
})
