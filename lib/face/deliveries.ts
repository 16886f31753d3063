import type { Delivery } from '@/lib/data/delivery-dto'
import type { MessageKind } from '@/lib/notify/message'

const WHAT: Record<MessageKind, string> = {
  raised: 'new incident',
  next: 'nobody has it yet',
  graver: 'graver',
  taken: 'somebody has it',
  cleared: 'cleared',
  resolved: 'resolved',
  reopened: 'open again',
  test: 'test',
}

const BY: Record<Delivery['by'], string> = { email: 'e-mail', sms: 'SMS', webhook: 'webhook' }

export function deliveryWhat({ kind, incident, overlay }: Delivery): string {
  const where = [incident && `incident ${incident.number}`, overlay].filter(Boolean).join(', ')
  return where === '' ? WHAT[kind] : `${WHAT[kind]} (${where})`
}

export const deliveryTo = ({ to, by }: Delivery) => `${to}, ${BY[by]}`

/** How it stands, shortly. */
export function deliveryState({ state, attempts }: Delivery): string {
  if (state === 'waiting') return attempts.length === 0 ? 'waiting' : 'to be tried again'
  if (state === 'sending') return 'under way'
  return state === 'dropped' ? 'not sent' : state
}

/** One sentence for all of them, before any figure. */
export function deliveriesSentence(deliveries: readonly Delivery[]): string {
  const failed = deliveries.filter(({ state }) => state === 'failed' || state === 'dropped').length
  const waiting = deliveries.filter(({ state }) => state === 'waiting' || state === 'sending').length
  if (deliveries.length === 0) return 'Nothing has been sent yet.'
  if (failed > 0)
    return `${failed} of the last ${deliveries.length} did not get out: look at the answer, set right what it names, and send them again.`
  if (waiting > 0) return `${waiting} of the last ${deliveries.length} are still on their way.`
  return deliveries.length === 1
    ? 'The one message so far was taken by the other side.'
    : `All of the last ${deliveries.length} were taken by the other side.`
}
