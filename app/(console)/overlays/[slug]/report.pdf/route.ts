import { z } from 'zod'
import { getMonthReport, monthSchema } from '@/lib/data/month-report'
import { attachment } from '@/lib/http/attachment'
import { route } from '@/lib/http/route'
import { monthReport } from '@/lib/report/month-report'
import { printReport } from '@/lib/report/print'

const params = z.object({ slug: z.string() })
/** The month that runs, where none is named. */
const query = z.object({ month: monthSchema.optional() })

export const GET = route('incident.list', { params, query }, async (call, { params, query }) => {
  const month = query.month ?? call.now.toISOString().slice(0, 7)
  const input = await getMonthReport(call, params.slug, month)
  return attachment({
    name: `${params.slug}-${month}.pdf`,
    mediaType: 'application/pdf',
    bytes: await printReport(monthReport(input)),
  })
})
