import type { Reading } from '@/lib/data/dto'
import { formatCount, formatHigh, formatInterval, formatReading, formatShare } from './format'

export interface FigureText {
  id: 'reading' | 'usual' | 'next' | 'check' | 'exact' | 'links' | 'agents' | 'ends' | `piece-${number}`
  /** Of a piece: which it is. */
  label?: string
  value: string
  remark: string
  /** Split or unheard: the only things that are red. */
  grave?: boolean
  /** Must be seen, without being one of those. */
  strong?: boolean
}

/** The title block in words and figures. The age of the last good value is added where it is shown. */
export function titleFigures(reading: Reading): FigureText[] {
  return [
    readingFigure(reading),
    ...pieceFigures(reading),
    usualFigure(reading),
    nextFigure(reading),
    checkFigure(reading),
    ...exactFigure(reading),
    linksFigure(reading),
    agentsFigure(reading),
    ...endsFigure(reading),
  ]
}

function readingFigure(reading: Reading): FigureText {
  const { lambda2, low, high, core, last, confidence } = reading
  if (lambda2 === null) {
    if (!last) return { id: 'reading', value: 'none yet', remark: 'the first one is on its way' }
    return { id: 'reading', value: 'withheld', remark: `last ${formatReading(last.lambda2)}` }
  }
  const shown = core ?? { lambda2, low, high }
  const interval =
    shown.low !== null && shown.high !== null
      ? `${Math.round(confidence * 100)} %: ${formatInterval(shown.low, shown.high, shown.lambda2)}`
      : 'no interval yet'
  const whole = core ? `, with loose ends ${formatReading(lambda2)}` : ''
  return { id: 'reading', value: formatReading(shown.lambda2), remark: `${interval}${whole}` }
}

/** Each piece by itself: once split, that is what its part of the operators can still rely on. */
function pieceFigures({ parts = [] }: Reading): FigureText[] {
  return parts.map(({ side, nodes, label, lambda2, low, high, settling }, index) => {
    const who = [formatCount(nodes, 'node'), ...(label ? [label.values.join(', ')] : [])].join(' · ')
    const interval =
      low !== null && high !== null && lambda2 !== null ? formatInterval(low, high, lambda2) : null
    return {
      id: `piece-${index}`,
      label: side
        ? `side ${side} by itself`
        : parts.length === 1
          ? 'still heard'
          : `piece ${index + 1} by itself`,
      value: lambda2 === null ? (nodes === 1 ? 'alone' : 'being read') : formatReading(lambda2),
      remark: settling ? `${who}; settling` : interval ? `${who}; ${interval}` : who,
    }
  })
}

function usualFigure({ lambda2, core, usual, last }: Reading): FigureText {
  const now = core?.lambda2 ?? lambda2 ?? last?.lambda2 ?? null
  if (usual === null) return { id: 'usual', value: 'not yet', remark: 'needs 7 days of readings' }
  if (now === null || usual <= 0) return { id: 'usual', value: '–', remark: `median ${formatReading(usual)}` }
  const when = lambda2 === null ? 'last value; ' : ''
  return { id: 'usual', value: formatShare(now / usual), remark: `${when}median ${formatReading(usual)}` }
}

function nextFigure({ core, lambda2: whole, lambda3AtMost, singleCut, level }: Reading): FigureText {
  if (lambda3AtMost === null) return { id: 'next', value: '–', remark: 'not known' }
  const value = formatHigh(lambda3AtMost)
  if (singleCut === false) return { id: 'next', value, remark: 'about as strong' }
  const lambda2 = core?.lambda2 ?? whole
  const times = lambda2 !== null && lambda2 > 0 && level !== 'split' ? lambda3AtMost / lambda2 : null
  return {
    id: 'next',
    value,
    remark: times === null ? 'at most' : `at most ${times.toFixed(1)} times stronger`,
  }
}

function checkFigure(reading: Reading): FigureText {
  const { lambda2, crossCheck, check } = reading
  if (crossCheck === null) return { id: 'check', value: '–', remark: 'not known' }
  const value = formatReading(crossCheck)
  if (check !== 'apart' || lambda2 === null) return { id: 'check', value, remark: checkRemark(reading) }
  const apart = formatShare(Math.abs(crossCheck - lambda2) / lambda2)
  return {
    id: 'check',
    value,
    remark: `disagrees by ${apart}: do not rely on the reading`,
    strong: true,
  }
}

function checkRemark({ core, check, data, level }: Reading): string {
  if (check === 'agrees') return core ? 'agrees, loose ends and all' : 'agrees'
  if (check === 'unsure') return data === 'settling' ? 'settling with the reading' : 'not in line yet'
  return level === 'split' ? 'as good as zero' : 'not compared'
}

/** Where links are named: what they come to, worked out without any walkers. */
function exactFigure({ exact }: Reading): FigureText[] {
  if (!exact) return []
  const { lambda2, links, oneEnd, reading, check } = exact
  const value = formatReading(lambda2)
  const of = `of ${formatCount(links, 'named link')}${oneEnd > 0 ? `, ${oneEnd} by one end only` : ''}`
  if (check !== 'apart' || reading === null)
    return [{ id: 'exact', value, remark: check === 'agrees' ? `agrees; ${of}` : of }]
  const by = lambda2 > 0 ? ` by ${formatShare(Math.abs(reading - lambda2) / lambda2)}` : ''
  return [
    {
      id: 'exact',
      value,
      remark: `the reading differs${by}: links named are not those measured, or an agent errs; ${of}`,
      strong: true,
    },
  ]
}

function linksFigure({ coverage }: Reading): FigureText {
  const { linksMeasured, linksKnown, withoutAgent = 0 } = coverage
  const missing = linksKnown - linksMeasured
  const value = `${linksMeasured} of ${linksKnown}`
  if (linksKnown === 0) return { id: 'links', value, remark: 'none known yet' }
  if (withoutAgent > 0)
    return { id: 'links', value, remark: `${formatCount(withoutAgent, 'neighbour')} without an agent` }
  return { id: 'links', value, remark: missing > 0 ? `${missing} not measured` : 'all' }
}

function agentsFigure({ coverage, last }: Reading): FigureText {
  const { heard, joined, unheard } = coverage
  // Before the first reading agents are on their way, not gone.
  if (last === null && heard === 0) return { id: 'agents', value: `0 of ${joined}`, remark: 'none heard yet' }
  const remark = unheard > 0 ? `${unheard} unheard` : 'all'
  return { id: 'agents', value: `${heard} of ${joined}`, remark, grave: unheard > 0 && last !== null }
}

function endsFigure({ looseEnds }: Reading): FigureText[] {
  if (looseEnds.length === 0) return []
  const nodes = looseEnds.reduce((sum, end) => sum + end.nodes, 0)
  const [only] = looseEnds
  const remark =
    looseEnds.length === 1 && only ? `on ${formatCount(only.links, 'link')}` : `in ${looseEnds.length} groups`
  return [{ id: 'ends', value: formatCount(nodes, 'node'), remark }]
}
