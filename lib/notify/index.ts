/** What leaves the server. */
export { type ChannelKind, type QuietHours, quietHoursSchema } from './channel'
export type { Answer, Letter, WayKind, Ways, WebhookTarget } from './letter'
export type { MessageBody, MessageKind, MessageState } from './message'
export { enqueue, type NewMessage, OUTBOX_CHANNEL } from './outbox'
export { isReachable, readPrivateAllowed } from './public-address'
export { Sender, type SenderComponents, type SenderLimits } from './sender'
export { waysFrom } from './settings'
