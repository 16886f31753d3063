import { graphMl, linksCsv, nodesCsv } from '@/lib/export'
import type { Call } from '@/lib/http/call'
import { listLinks } from './links'
import { listNodes } from './nodes'
import { openOverlay } from './overlays'

export const EXPORTED_FILES = ['overlay.graphml', 'nodes.csv', 'links.csv'] as const
export type ExportedFile = (typeof EXPORTED_FILES)[number]

/** More than any overlay has. */
const ALL = 1_000_000

/** What the caller may see of nodes and links, as a file. */
export async function exportOverlay(
  call: Call,
  slug: string,
  file: ExportedFile,
): Promise<{ name: string; mediaType: string; bytes: Uint8Array }> {
  await openOverlay(call, 'overlay.export', slug)
  const nodes = async () => (await listNodes(call, slug, { limit: ALL })).items
  const links = async () => (await listLinks(call, slug, { limit: ALL })).items
  const as = (mediaType: string, text: string) => ({
    name: `${slug}-${file}`,
    mediaType,
    bytes: new TextEncoder().encode(text),
  })
  switch (file) {
    case 'nodes.csv':
      return as('text/csv', nodesCsv(await nodes()))
    case 'links.csv':
      return as('text/csv', linksCsv(await links()))
    case 'overlay.graphml': {
      const at = call.now.toISOString()
      return as(
        'application/graphml+xml',
        graphMl({ name: slug, at, nodes: await nodes(), links: await links() }),
      )
    }
  }
}
