import type { CallOrder, Telling, Turn } from '@/lib/data/telling-dto'
import type { ChannelKind } from '@/lib/notify/channel'
import type { CallStep } from '@/lib/warn/call-order'
import { formatCount } from './format'
import { formatDuration } from './time'

export const WEEKDAYS = ['Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday', 'Sunday']
export const CHANNEL_WORDS: Record<ChannelKind, string> = { email: 'e-mail', sms: 'SMS' }
export const hourText = (hour: number): string => `${String(hour).padStart(2, '0')}:00`

/** "Mon 7 Dec 09:00", by the zone's clock. */
export function momentIn(zone: string, at: string): string {
  const format = new Intl.DateTimeFormat('en-GB', {
    timeZone: zone,
    weekday: 'short',
    day: 'numeric',
    month: 'short',
    hour: '2-digit',
    minute: '2-digit',
    hourCycle: 'h23',
  })
  const found = new Map(format.formatToParts(Date.parse(at)).map((part) => [part.type, part.value]))
  const part = (type: Intl.DateTimeFormatPartTypes) => found.get(type) ?? ''
  return `${part('weekday')} ${part('day')} ${part('month')} ${part('hour')}:${part('minute')}`
}

/** "R. Quill, by e-mail and SMS". */
function personText(telling: Telling, id: string): string {
  const person = telling.people.find((one) => one.id === id)
  if (!person) return 'somebody who has left the team'
  const by = person.by.map((kind) => CHANNEL_WORDS[kind]).join(' and ')
  return by ? `${person.name} by ${by}` : `${person.name} (no channel: cannot be reached)`
}

/** "R. Quill has the turn until Mon 7 Dec 09:00 (Europe/London)"; who has it now. */
export function turnText({ holder, until, zone }: Turn): string {
  const end = until ? ` until ${momentIn(zone, until)} (${zone})` : ''
  return holder ? `${holder.name} has the turn${end}` : `Nobody has the turn${end}`
}

/** Whom a step reaches now, each in words. */
export function stepWho(telling: Telling, step: CallStep): string[] {
  const turns = telling.turns
    .filter(({ id }) => step.turnIds.includes(id))
    .map((turn) => {
      const end = turn.until ? ` until ${momentIn(turn.zone, turn.until)} (${turn.zone})` : ''
      return turn.holder
        ? `${personText(telling, turn.holder.id)}, whose turn “${turn.name}” is${end}`
        : `nobody of the turn “${turn.name}”${end}`
    })
  const people = step.userIds.map((id) => personText(telling, id))
  const webhooks = telling.webhooks
    .filter(({ id }) => step.webhookIds.includes(id))
    .map(({ name }) => `the webhook “${name}”`)
  const operators = step.operators ? ['all operators and owners'] : []
  const all = [...turns, ...people, ...operators, ...webhooks]
  return all.length > 0 ? all : ['nobody']
}

/** How long after the step before. */
export function afterText(step: CallStep, index: number): string {
  if (index === 0) return step.afterMinutes === 0 ? 'at once' : `after ${minutes(step.afterMinutes)}`
  return `after ${minutes(step.afterMinutes)} more, while nobody has it`
}

const minutes = (count: number) => formatCount(count, 'minute')

/** A sentence for each call order that rules tell by, or for all where none does; what must be said first where there is none. */
export function toldNow(telling: Telling): string[] {
  const { callOrders } = telling
  if (callOrders.length === 0)
    return ['Nobody is told of a warning: there is no call order yet. Incidents are recorded all the same.']
  const used = callOrders.filter(({ rules }) => rules > 0)
  if (used.length > 0) return used.map((order) => orderSentence(telling, order))
  return [
    'Nobody is told of a warning: no rule uses a call order yet.',
    ...callOrders.map((order) => orderSentence(telling, order)),
  ]
}

/** The address outside is called once a minute: this much later it has been missed. */
const HEARTBEAT_LATE_MS = 3 * 60_000

/** Whether warnings themselves work, and whether anybody outside would hear of it if they did not. */
export function watcherNow({ watcher, at }: Pick<Telling, 'watcher' | 'at'>): string[] {
  const nowMs = Date.parse(at)
  const ago = (then: string) => `${formatDuration(Math.max(0, (nowMs - Date.parse(then)) / 1000))} ago`
  const { isAlive, evaluatedAt, sentAt, heartbeatAt } = watcher
  const rules = evaluatedAt
    ? `rules were last evaluated ${ago(evaluatedAt)}`
    : 'rules have not been evaluated yet'
  const messages = sentAt
    ? `the outbox was last looked through ${ago(sentAt)}`
    : 'the outbox has not been looked through yet'
  const works = isAlive
    ? 'Rules are being evaluated and messages sent.'
    : `Warnings stand still: ${rules}, ${messages}. Nobody is told of anything until this server and its database work again.`
  return [
    works,
    heartbeatAt === null ? UNWATCHED : heartbeatSentence(ago(heartbeatAt), isLate(heartbeatAt, nowMs)),
  ]
}

const UNWATCHED =
  'Nobody outside would notice if this server fell silent: no heartbeat has been taken yet. Set THINSPAN_HEARTBEAT_URL to an address that raises the alarm when it is not called.'

const isLate = (heartbeatAt: string, nowMs: number): boolean =>
  nowMs - Date.parse(heartbeatAt) > HEARTBEAT_LATE_MS

const heartbeatSentence = (ago: string, late: boolean): string =>
  late
    ? `The heartbeat is late: it was last taken ${ago}. Whoever watches it should have raised the alarm.`
    : `The heartbeat was last taken ${ago}.`

function orderSentence(telling: Telling, order: CallOrder): string {
  const steps = order.steps.map((step, index) => {
    const when =
      index === 0
        ? step.afterMinutes === 0
          ? 'now'
          : afterText(step, 0)
        : `after ${minutes(step.afterMinutes)} more`
    return `${when} ${stepWho(telling, step).join(' and ')}`
  })
  return `“${order.name}” tells ${steps.join('; ')}.`
}

/** What goes with a call order, for the question before. */
export function withoutOrder({ rules }: CallOrder): string {
  if (rules === 0) return 'No rule uses it.'
  return `${formatCount(rules, 'rule')} will tell nobody. Incidents are recorded all the same.`
}
