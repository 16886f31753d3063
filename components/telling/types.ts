import type { Channel, WebhookSecret } from '@/lib/data/telling-dto'
import type { FormState } from '@/lib/http/form-state'

export type Action<T> = (previous: FormState<T>, form: FormData) => Promise<FormState<T>>

export interface ChannelActions {
  addChannelAction: Action<Channel>
  changeChannelAction: Action<Channel>
  removeChannelAction: Action<void>
  /** Sends a message that says it is a test; no button without it. */
  testChannelAction: Action<{ id: string }>
}
export interface TurnActions {
  createTurnAction: Action<void>
  changeTurnAction: Action<void>
  removeTurnAction: Action<void>
  addStandInAction: Action<void>
  removeStandInAction: Action<void>
}
export interface CallOrderActions {
  createCallOrderAction: Action<void>
  changeCallOrderAction: Action<void>
  removeCallOrderAction: Action<void>
}
export interface WebhookActions {
  addWebhookAction: Action<WebhookSecret>
  rotateWebhookAction: Action<WebhookSecret>
  enableWebhookAction: Action<void>
  removeWebhookAction: Action<void>
  /** Sends an event that says it is a test; no button without it. */
  testWebhookAction: Action<{ id: string }>
}
