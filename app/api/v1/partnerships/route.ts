import { joinAsPartner } from '@/lib/data'
import { redeemSchema } from '@/lib/data/partner-dto'
import { route } from '@/lib/http'

/** Takes part in an overlay of another team, by its invitation. */
export const POST = route('partner.join', { body: redeemSchema, status: 201 }, (call, { body }) =>
  joinAsPartner(call, body),
)
