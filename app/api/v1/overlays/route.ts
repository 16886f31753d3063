import { createOverlay, listOverlays } from '@/lib/data'
import { newOverlaySchema } from '@/lib/data/dto'
import { route } from '@/lib/http'

export const GET = route('overlay.list', {}, async (call) => ({
  items: await listOverlays(call),
  next: null,
}))

export const POST = route('overlay.create', { body: newOverlaySchema, status: 201 }, (call, { body }) =>
  createOverlay(call, body),
)
