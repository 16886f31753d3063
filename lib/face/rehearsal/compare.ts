import type { Reading } from '@/lib/data/dto'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { formatCount, formatInterval, formatReading } from '../format'

/** One line of what is beside what would be. Null where it is not known. */
export interface Compared {
  id: 'reading' | 'level' | 'nodes' | 'sides' | 'crossing'
  live: string | null
  would: string | null
  /** Below the figure. */
  liveRemark: string | null
  wouldRemark: string | null
  /** What is split is red, and only that. */
  grave?: boolean
}

type Rehearsed = Pick<
  RehearsalDto,
  'reading' | 'live' | 'level' | 'sides' | 'crossingLinks' | 'taken' | 'remain' | 'state' | 'answer'
>
type Beside = Pick<Reading, 'level' | 'sides' | 'crossingLinks' | 'core' | 'lambda2' | 'low' | 'high'>

/** @param beside the overlay's reading at the same moment; null while it is not known */
export function compared(rehearsal: Rehearsed, beside: Beside | null): Compared[] {
  const { reading, level, sides, crossingLinks, taken, remain } = rehearsal
  const live = rehearsal.live ?? figuresOf(beside)
  const splits = rehearsal.answer === 'splits'
  return [
    {
      id: 'reading',
      live: live && formatReading(live.lambda2),
      would: reading ? formatReading(reading.lambda2) : splits ? 'none' : null,
      liveRemark: live && formatInterval(live.low, live.high, live.lambda2),
      wouldRemark: reading && formatInterval(reading.low, reading.high, reading.lambda2),
    },
    {
      id: 'level',
      live: beside?.level ?? null,
      would: level,
      liveRemark: null,
      wouldRemark: null,
      grave: level === 'split',
    },
    {
      id: 'nodes',
      live: taken === null || remain === null ? null : String(taken + remain),
      would: remain === null ? null : String(remain),
      liveRemark: null,
      wouldRemark: taken === null ? null : `${formatCount(taken, 'node')} away`,
    },
    {
      id: 'sides',
      live: beside && (sidesText(beside.sides) ?? NO_SIDES),
      would: sidesText(sides) ?? (isOver(rehearsal) ? NO_SIDES : null),
      liveRemark: null,
      wouldRemark: null,
    },
    {
      id: 'crossing',
      live: beside && (beside.crossingLinks?.toString() ?? null),
      would: crossingLinks?.toString() ?? null,
      liveRemark: null,
      wouldRemark: null,
    },
  ]
}

const NO_SIDES = 'none stand out'
const isOver = ({ state }: Rehearsed): boolean => state === 'done'

function sidesText(sides: RehearsalDto['sides']): string | null {
  return sides?.map(({ name, nodes }) => `${name}: ${nodes}`).join(' · ') ?? null
}

/** Of the core, where loose ends are told apart: that is what the rehearsal is held against. */
function figuresOf(beside: Beside | null): RehearsalDto['live'] {
  if (!beside) return null
  const { lambda2, low, high } = beside.core ?? beside
  return lambda2 === null || low === null || high === null ? null : { lambda2, low, high }
}
