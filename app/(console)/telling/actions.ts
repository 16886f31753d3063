'use server'

import { revalidatePath } from 'next/cache'
import { z } from 'zod'
import {
  addChannel,
  addStandIn,
  addWebhook,
  changeCallOrder,
  changeChannel,
  changeTurn,
  createCallOrder,
  createTurn,
  enableWebhook,
  removeCallOrder,
  removeChannel,
  removeStandIn,
  removeTurn,
  removeWebhook,
  retryDelivery,
  rotateWebhook,
  testChannel,
  testWebhook,
} from '@/lib/data'
import { newChannelSchema, newStandInSchema, newWebhookSchema } from '@/lib/data/telling-dto'
import { action } from '@/lib/http'
import { callOrderFields, channelFields, turnFields } from './fields'

const after = () => revalidatePath('/telling')
const options = { after }
const one = z.object({ id: z.uuid() })
const inTeam = { team: z.string() }

export const addChannelAction = action(
  'channel.change',
  newChannelSchema,
  (call, input) => addChannel(call, input),
  options,
)
export const changeChannelAction = action(
  'channel.change',
  channelFields,
  (call, input) => changeChannel(call, input),
  options,
)
export const removeChannelAction = action(
  'channel.change',
  one,
  (call, { id }) => removeChannel(call, id),
  options,
)

export const createTurnAction = action(
  'turn.change',
  turnFields.extend(inTeam),
  (call, input) => createTurn(call, input),
  options,
)
export const changeTurnAction = action(
  'turn.change',
  turnFields.extend(one.shape),
  (call, input) => changeTurn(call, input),
  options,
)
export const removeTurnAction = action('turn.change', one, (call, { id }) => removeTurn(call, id), options)
export const addStandInAction = action(
  'turn.change',
  newStandInSchema,
  (call, input) => addStandIn(call, input),
  options,
)
export const removeStandInAction = action(
  'turn.change',
  one,
  (call, { id }) => removeStandIn(call, id),
  options,
)

export const createCallOrderAction = action(
  'call-order.change',
  callOrderFields.extend(inTeam),
  (call, input) => createCallOrder(call, input),
  options,
)
export const changeCallOrderAction = action(
  'call-order.change',
  callOrderFields.extend(one.shape),
  (call, input) => changeCallOrder(call, input),
  options,
)
export const removeCallOrderAction = action(
  'call-order.change',
  one,
  (call, { id }) => removeCallOrder(call, id),
  options,
)

export const addWebhookAction = action(
  'webhook.change',
  newWebhookSchema.extend(inTeam),
  (call, input) => addWebhook(call, input),
  options,
)
export const rotateWebhookAction = action(
  'webhook.change',
  one,
  (call, { id }) => rotateWebhook(call, id),
  options,
)
export const enableWebhookAction = action(
  'webhook.change',
  one,
  (call, { id }) => enableWebhook(call, id),
  options,
)
export const removeWebhookAction = action(
  'webhook.change',
  one,
  (call, { id }) => removeWebhook(call, id),
  options,
)

export const testChannelAction = action('channel.test', one, (call, { id }) => testChannel(call, id))
export const testWebhookAction = action('webhook.test', one, (call, { id }) => testWebhook(call, id))

export const retryDeliveryAction = action('delivery.retry', z.object({ id: z.string() }), (call, { id }) =>
  retryDelivery(call, id),
)
