import { deliveryFilterSchema, listDeliveries } from '@/lib/data/deliveries'
import { route } from '@/lib/http/route'

export const GET = route('delivery.list', { query: deliveryFilterSchema }, (call, { query }) =>
  listDeliveries(call, query),
)
