'use server'

import { z } from 'zod'
import { retryDelivery, testChannel, testWebhook } from '@/lib/data'
import { action } from '@/lib/http'

export const retryDeliveryAction = action('delivery.retry', z.object({ id: z.string() }), (call, { id }) =>
  retryDelivery(call, id),
)

export const testChannelAction = action(
  'channel.test',
  z.object({ channel: z.string() }),
  (call, { channel }) => testChannel(call, channel),
)

export const testWebhookAction = action(
  'webhook.test',
  z.object({ webhook: z.string() }),
  (call, { webhook }) => testWebhook(call, webhook),
)
