import { median } from '@/lib/warn/stats/median'
import { theilSen } from '@/lib/warn/stats/theil-sen'
import type { Memory, Trend } from './memory'

/** Long enough to tell a slope from noise, short enough to forget a change that is over. */
export const TREND_INTERVALS = 60
export const TREND_LEAST_READINGS = 20
/** A change over the window of less than this share of the reading is no trend. */
export const TREND_LEAST_CHANGE = 0.1
const LEAST_SPACING_INTERVALS = 0.75
/** Pairs grow with the square; this many readings, evenly chosen, tell the same slope. */
const MOST_COMPARED = 60

type Recent = Memory['recent']

export function withReading(recent: Recent, next: Recent[number], intervalMs: number): Recent {
  // Kept with the state of every round: no more digits than a slope needs.
  const short = (value: number): number => Number(value.toPrecision(6))
  // In haste readings come several times as often; a slope needs the span, not the number.
  const last = recent[recent.length - 1]
  if (last && next[0] - last[0] < LEAST_SPACING_INTERVALS * intervalMs) return recent
  const kept: Recent[number] = [Math.round(next[0]), short(next[1]), short(next[2])]
  return [...recent, kept].filter(([atMs]) => next[0] - atMs <= TREND_INTERVALS * intervalMs)
}

/** Null before there are enough readings. */
export function trendOf(recent: Recent): Trend | null {
  if (recent.length < TREND_LEAST_READINGS) return null
  const compared = thin(recent)
  const middle = median(compared.map(([, value]) => value))
  const half = median(compared.map(([, , width]) => width))
  const least = Math.max(TREND_LEAST_CHANGE * middle, half)
  const change = changeOver(compared)
  if (Math.abs(change) <= least) return 'steady'
  // A fall that is being made good is no fall, and the other way round.
  const lately = changeOver(compared.slice(-Math.ceil(compared.length / 3)))
  if (Math.abs(lately) > least && Math.sign(lately) !== Math.sign(change)) return 'steady'
  return change < 0 ? 'falling' : 'rising'
}

function changeOver(points: Recent): number {
  const first = points[0]!
  const last = points[points.length - 1]!
  return theilSen(points) * (last[0] - first[0])
}

function thin(recent: Recent): Recent {
  if (recent.length <= MOST_COMPARED) return recent
  const step = (recent.length - 1) / (MOST_COMPARED - 1)
  return Array.from({ length: MOST_COMPARED }, (_, index) => recent[Math.round(index * step)]!)
}
