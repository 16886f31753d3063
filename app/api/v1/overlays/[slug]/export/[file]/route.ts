import { z } from 'zod'
import { EXPORTED_FILES, exportOverlay } from '@/lib/data/export'
import { attachment } from '@/lib/http/attachment'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), file: z.enum(EXPORTED_FILES) })

export const GET = route('overlay.export', { params }, async (call, { params }) =>
  attachment(await exportOverlay(call, params.slug, params.file)),
)
