import { sql } from '@/lib/db'
import { authorise, route } from '@/lib/http'

export const dynamic = 'force-dynamic'

/** 200 while requests can be served, which takes the database; a load balancer needs no more. */
export const GET = route('health.read', {}, async (call) => {
  authorise(call, 'health.read')
  await sql(call.em, 'select 1')
  return { status: 'ok', at: call.now.toISOString() }
})
