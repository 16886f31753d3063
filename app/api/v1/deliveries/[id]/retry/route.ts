import { z } from 'zod'
import { retryDelivery } from '@/lib/data/deliveries'
import { route } from '@/lib/http/route'

const params = z.object({ id: z.string() })

export const POST = route('delivery.retry', { params, status: 202 }, (call, { params }) =>
  retryDelivery(call, params.id),
)
