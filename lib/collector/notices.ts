import { z } from 'zod'
import { type EntityManager, notify } from '@/lib/db'

/** An overlay has joined agents that it may not have had before: someone should lead it. */
export const LEADERS_CHANNEL = 'leaders'
/** Someone was shut out of an overlay or let in again: its leader should say so to all the others at once. */
export const ORDERS_CHANNEL = 'orders'

/** What happened in an overlay; listeners look the thing itself up. */
export const noticeSchema = z.object({ kind: z.enum(['reading', 'event']) })
export type Notice = z.infer<typeof noticeSchema>

export function overlayChannel(overlayId: string): string {
  return `overlay:${overlayId}`
}

export async function tell(em: EntityManager, overlayId: string, notice: Notice): Promise<void> {
  await notify(em, overlayChannel(overlayId), JSON.stringify(notice))
}
