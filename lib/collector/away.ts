import type { EntityManager } from '@/lib/db'
import type { AwaySummary } from '@/lib/protocol'
import { eventData } from './events-store'
import type { EventDraft } from './judge'
import { tell } from './notices'
import { query } from './query'
import { eventOf } from './said'

/** One agent's times without a collector are told once in this time, whatever it says. */
export const AWAY_EVENT_MINUTES = 10

/** What is worth telling of times without a collector: null where no link was lost in any of them. */
export function awayEvent(name: string, spans: readonly AwaySummary[]): EventDraft | null {
  const worse = spans.filter(({ linkDowns }) => linkDowns > 0)
  const [first] = worse
  const last = worse.at(-1)
  if (!first || !last) return null
  const downs = worse.reduce((sum, { linkDowns }) => sum + linkDowns, 0)
  const least = Math.min(...worse.map(({ leastLive }) => leastLive))
  const known = Math.max(...worse.map((span) => span.known))
  const lost = downs === 1 ? 'a link of' : `${downs} times a link of`
  return eventOf('collector-away', [
    `Out of the collector's reach from ${shown(first.fromAt)} to ${shown(last.toAt)}, ${lost} `,
    { node: name },
    ` went down: at the least ${least} of ${known} were up`,
  ])
}

/** Enters it once: a reply may have been lost, and then it is told again. */
export async function enterAway(
  em: EntityManager,
  { overlayId, name }: { overlayId: string; name: string },
  spans: readonly AwaySummary[],
): Promise<void> {
  const event = awayEvent(name, spans)
  if (!event) return
  const entered = await query(
    em,
    `insert into overlay_events (overlay_id, at, kind, text, data)
     select ?::uuid, clock_timestamp(), ?, ?, ?::jsonb where not exists (
       select from overlay_events where overlay_id = ? and kind = ?
         and at > clock_timestamp() - make_interval(mins => ?) and position(? in text) > 0)
     returning id`,
    [
      overlayId,
      event.kind,
      event.text,
      eventData(event),
      overlayId,
      event.kind,
      AWAY_EVENT_MINUTES,
      ` link of ${name} went down: `,
    ],
  )
  if (entered.length > 0) await tell(em, overlayId, { kind: 'event' })
}

/** To the minute, in UTC. */
const shown = (at: string): string => `${new Date(at).toISOString().slice(0, 16).replace('T', ' ')} UTC`
