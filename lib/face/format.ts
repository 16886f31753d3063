/** Numbers and names as people read them. Bounds are rounded outward: never narrower than they are. */
import { lambda2Without } from '@/lib/method/cut-bounds'

const NARROW_SPACE = '\u202f'

/** Decimals that leave at least three significant figures for values from 0.1 up, three figures below. */
export function decimalsFor(value: number): number {
  const size = Math.abs(value)
  if (size === 0 || !Number.isFinite(size)) return 3
  if (size >= 1000) return 0
  if (size >= 100) return 1
  if (size >= 10) return 2
  if (size >= 0.1) return 3
  return Math.min(9, 2 - Math.floor(Math.log10(size)))
}

/** Nobody needs to tell smaller readings from nothing. */
const LEAST_READING = 1e-6

export function formatReading(value: number): string {
  if (value > 0 && value < LEAST_READING) return `<${LEAST_READING.toFixed(6)}`
  return plain(value, decimalsFor(value))
}

/** The largest number with so many decimals that is not above `value`. */
export function formatLow(value: number, decimals = decimalsFor(value)): string {
  const near = Number(value.toFixed(decimals))
  return plain(near <= value ? near : near - 10 ** -decimals, decimals)
}

/** The smallest number with so many decimals that is not below `value`. */
export function formatHigh(value: number, decimals = decimalsFor(value)): string {
  const near = Number(value.toFixed(decimals))
  return plain(near >= value ? near : near + 10 ** -decimals, decimals)
}

/** "0.231–0.245", both with the decimals of the reading they belong to. */
export function formatInterval(low: number, high: number, reading = high): string {
  const decimals = decimalsFor(reading)
  return `${formatLow(low, decimals)}–${formatHigh(high, decimals)}`
}

/** A share of 1 as "36 %"; what is under half a per cent but not nothing is "<1 %". */
export function formatShare(share: number): string {
  if (share > 0 && share < 0.005) return `<1${NARROW_SPACE}%`
  return `${Math.round(share * 100)}${NARROW_SPACE}%`
}

/** What the reading is at most without a link, rounded up, never down. */
export function formatAtMostWithout(lambda2: number, share: number): string {
  return formatHigh(lambda2Without(lambda2, share), decimalsFor(lambda2))
}

export function formatCount(count: number, one: string, many = `${one}s`): string {
  return `${count.toLocaleString('en-GB')} ${count === 1 ? one : many}`
}

/** Links have no direction. */
export function formatLink(a: string, b: string): string {
  return `${a} – ${b}`
}

/** A signed value with a true minus. */
export function formatValue(value: number): string {
  return plain(value, 2)
}

function plain(value: number, decimals: number): string {
  const text = value.toFixed(decimals)
  return text.startsWith('-') && Number(text) !== 0 ? `−${text.slice(1)}` : text.replace('-', '')
}
