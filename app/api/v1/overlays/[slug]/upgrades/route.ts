import { z } from 'zod'
import { newUpgradeOfferSchema } from '@/lib/data/dto'
import { getUpgrades, offerUpgrade } from '@/lib/data/upgrades'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('upgrade.read', { params }, (call, { params }) => getUpgrades(call, params.slug))

export const POST = route(
  'upgrade.offer',
  { params, body: newUpgradeOfferSchema, status: 201 },
  (call, { params, body }) => offerUpgrade(call, params.slug, body),
)
