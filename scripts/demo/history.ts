import { type EventDraft, judge } from '@/lib/collector/judge'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import { HOUR_MS, usualOf } from '@/lib/collector/usual'
import type { Reading } from '@/lib/data/dto'
import type { Random } from '@/lib/method/random'
import { median } from '@/lib/warn/stats/median'
import type { Phase, Sample } from './phases'

/** Eight days, so that what is usual (seven days at the least) is known from the first minute. */
export const HISTORY_HOURS = 8 * 24
/** Closer together towards the end, so that a drawing of the last minutes has a line as one of the last days has. */
const SPACINGS = [
  { fromHours: HISTORY_HOURS, everySeconds: 900 },
  { fromHours: 24, everySeconds: 600 },
  { fromHours: 4, everySeconds: 60 },
  { fromHours: 0.25, everySeconds: 6 },
]
const ENDS_BEFORE_NOW_MS = 5_000
/** The trend looks back over 150 intervals; counted as so many intervals, thirty readings. */
const INTERVALS_PER_SLOT = 5

/** What happened, in hours before the end; outside of these the overlay was whole, or at ebb. */
const EPISODES: readonly { fromHours: number; toHours: number; phase: Phase }[] = [
  { fromHours: 77, toHours: 75, phase: 'thin' },
  { fromHours: 75, toHours: 73, phase: 'thinner' },
  { fromHours: 73, toHours: 70, phase: 'thinnest' },
  { fromHours: 70, toHours: 69.5, phase: 'thin' },
  { fromHours: 14, toHours: 12.5, phase: 'thin' },
  { fromHours: 12.5, toHours: 11.8, phase: 'thinner' },
  { fromHours: 11.8, toHours: 11.2, phase: 'thin' },
]
/** Half a lunar day: two ebbs in 24 h 50 min. */
const TIDE_HOURS = 12 + 25 / 60
const EBB_HOURS = 3
const NO_EBB_HOURS = 3

export interface History {
  readings: Reading[]
  events: (EventDraft & { at: string })[]
}

export function phaseAt(hoursBefore: number): Phase {
  const episode = EPISODES.find(({ fromHours, toHours }) => hoursBefore <= fromHours && hoursBefore > toHours)
  if (episode) return episode.phase
  return hoursBefore > NO_EBB_HOURS && hoursBefore % TIDE_HOURS < EBB_HOURS ? 'ebb' : 'whole'
}

interface Slot {
  atMs: number
  everyMs: number
  phase: Phase
}

export function slotsBefore(nowMs: number): Slot[] {
  const endMs = nowMs - ENDS_BEFORE_NOW_MS
  const slots: Slot[] = []
  SPACINGS.forEach(({ fromHours, everySeconds }, index) => {
    const everyMs = everySeconds * 1000
    const toMs = endMs - (SPACINGS[index + 1]?.fromHours ?? 0) * HOUR_MS
    for (let atMs = endMs - fromHours * HOUR_MS; atMs < toMs; atMs += everyMs)
      slots.push({ atMs, everyMs, phase: phaseAt((endMs - atMs) / HOUR_MS) })
  })
  return slots
}

/**
 * Lays simulated readings of each phase out over the days before `nowMs`, and judges them by the rules that judge
 * live ones. Numbers are the simulator's; only when they happened is invented. Every reading is marked as demo.
 */
export function layOutHistory(
  samples: Readonly<Record<Phase, readonly Sample[]>>,
  random: Random,
  nowMs: number,
): History {
  const history: History = { readings: [], events: [] }
  const hours = new Map<number, number>()
  let hour: { startMs: number; values: number[] } = { startMs: 0, values: [] }
  let usual: number | null = null
  let memory: Memory = BLANK_MEMORY
  for (const { atMs, everyMs, phase } of slotsBefore(nowMs)) {
    const startMs = Math.floor(atMs / HOUR_MS) * HOUR_MS
    if (startMs !== hour.startMs) {
      if (hour.values.length > 0) hours.set(hour.startMs, median(hour.values))
      hour = { startMs, values: [] }
      usual = usualOf(hours, atMs)
    }
    const pool = samples[phase]
    const sample = pool[Math.floor(random.uniform() * pool.length)]
    if (!sample) throw new RangeError(`no reading of the phase "${phase}" settled`)
    const { coverage } = sample.estimate
    const judged = judge({
      ...sample,
      estimate: {
        ...sample.estimate,
        atMs,
        // Simulated agents are told of no neighbours but those they measure.
        coverage: { ...coverage, linksKnown: coverage.linksMeasured },
      },
      agents: sample.agents.map((agent) => ({ ...agent, heardAtMs: atMs })),
      memory,
      meanWeightedDegree: coverage.meanWeightedDegree,
      usual,
      intervalMs: everyMs / INTERVALS_PER_SLOT,
    })
    memory = judged.memory
    if (judged.reading.lambda2 !== null && judged.reading.data === 'fresh')
      hour.values.push(judged.reading.lambda2)
    history.readings.push({ ...judged.reading, demo: true })
    history.events.push(...judged.events.map((event) => ({ ...event, at: judged.reading.at })))
  }
  return history
}
