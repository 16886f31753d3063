import type { MarkShape } from '@/components/ui'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { formatCount, formatReading } from '../format'
import { about } from '../settling'
import { formatMoment, formatRelative } from '../time'
import { excludedWords } from './choice'

type Answer = NonNullable<RehearsalDto['answer']>

export const ANSWER_WORDS: Record<Answer, string> = {
  holds: 'holds',
  'below-floor': 'below the floor',
  splits: 'splits',
}

/** Planned, waiting, running, or how it ended; of one that is done, the answer. */
export function stateWord({ state, answer, startsAt, startedAt }: RehearsalDto): string {
  if (state === 'done') return answer === null ? 'no answer' : ANSWER_WORDS[answer]
  if (state === 'waiting' && startsAt !== null && startedAt === null) return 'planned'
  return state
}

export function stateShape({ state, answer }: Pick<RehearsalDto, 'state' | 'answer'>): MarkShape {
  if (state === 'done') return answer === 'holds' ? 'full' : answer === 'splits' ? 'crossed' : 'short'
  return state === 'running' ? 'dashed' : 'hollow'
}

export const isOpen = ({ state }: Pick<RehearsalDto, 'state'>): boolean =>
  state === 'waiting' || state === 'running'

/** What is away, as the subject of a sentence: "draining 9 nodes", "cutting a – b". */
export function awayWords({ exclude, taken }: Pick<RehearsalDto, 'exclude' | 'taken'>): string {
  const { nodes, labels, links, between } = exclude
  if (links.length + between.length === 0) {
    if (labels.length === 0 && nodes.length > 4 && taken) return `draining ${formatCount(taken, 'node')}`
    return `draining ${excludedWords(exclude)}`
  }
  return nodes.length + labels.length === 0
    ? `cutting ${excludedWords(exclude)}`
    : `going without ${excludedWords(exclude)}`
}

/** The answer in one sentence, or how far it is from one. */
export function headline(rehearsal: RehearsalDto, nowMs: number | null): string {
  const { state, answer, reading, floor, startsAt } = rehearsal
  const does = awayWords(rehearsal)
  if (answer !== null) {
    const figures = [
      ...(reading && answer !== 'splits' ? [`${formatReading(reading.lambda2)} would remain`] : []),
      ...(floor && answer !== 'splits' ? [`floor ${formatReading(floor.lambda2)}`] : []),
    ]
    const tail = figures.length > 0 ? ` – ${figures.join(', ')}` : ''
    return `${ANSWERS[answer](does)}${tail}.`
  }
  if (state === 'cancelled') return `Cancelled before there was an answer: ${does}.`
  if (state === 'failed' || state === 'done') return `No answer: ${does} could not be rehearsed.`
  if (state === 'running') return `Rehearsing: ${does}.`
  const when = startsAt !== null && nowMs !== null ? Date.parse(startsAt) : null
  return when !== null && nowMs !== null && when > nowMs
    ? `Planned for ${formatMoment(when, nowMs)}: ${does}.`
    : `About to begin: ${does}.`
}

/** The rest of what the server says of it, whose first sentence is the answer that the headline has. */
export function detailOf({ verdict, answer }: Pick<RehearsalDto, 'verdict' | 'answer'>): string | null {
  if (verdict === null || answer === null) return null
  return verdict.replace(/^It (holds|does not hold|splits)\.\s*/, '')
}

const ANSWERS: Record<Answer, (does: string) => string> = {
  holds: (does) => `Yes: ${does} holds`,
  'below-floor': (does) => `No: ${does} brings the reading below the floor`,
  splits: (does) => `No: ${does} splits the overlay`,
}

/** Where it stands, for the line beside the bar; null once it is over. */
export function progressText(
  rehearsal: RehearsalDto,
  nowMs: number | null,
  most: number | null,
): string | null {
  const { state, endsInMs, answer, startsAt } = rehearsal
  if (state === 'waiting') {
    if (startsAt !== null && nowMs !== null && Date.parse(startsAt) > nowMs)
      return `Begins ${formatRelative(Date.parse(startsAt), nowMs)}.`
    return most === null
      ? 'Begins with the next orders.'
      : `Begins as soon as there is room: at most ${most} run at once.`
  }
  if (state !== 'running') return null
  const what =
    answer === null ? 'Walkers are out' : 'The answer is known; an order in waves is being looked for'
  return endsInMs === null || endsInMs <= 0 ? `${what}.` : `${what}: about ${about(endsInMs)} more.`
}

/** For the first page of an overlay: of the newest that was answered lately, or of one that is under way. */
export function lastLine(items: readonly RehearsalDto[], nowMs: number): { id: string; text: string } | null {
  const recent = items.find(
    ({ state, answer, endedAt }) =>
      state === 'running' || (answer !== null && endedAt !== null && Date.parse(endedAt) > nowMs - LATELY_MS),
  )
  if (!recent) return null
  const { id, state, endedAt } = recent
  const age = endedAt === null ? null : formatRelative(Date.parse(endedAt), nowMs)
  return {
    id,
    text:
      state === 'running' || age === null
        ? headline(recent, nowMs)
        : `Rehearsed ${age}. ${headline(recent, nowMs)}`,
  }
}

/** How long an answer stays on the first page. */
const LATELY_MS = 24 * 3_600_000
