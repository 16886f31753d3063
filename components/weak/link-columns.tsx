import { type Column, Lambda } from '@/components/ui'
import type { OverlayLink } from '@/lib/data/dto'
import { formatShare } from '@/lib/face/format'

const isLost = ({ state }: Pick<OverlayLink, 'state'>): boolean => state === 'lost'

/** What a link contributes to λ₂; of one that nobody hears any more nothing is known. */
export const SHARE: Column<OverlayLink> = {
  id: 'share',
  header: 'share of lambda2',
  heading: (
    <span>
      share of <Lambda n={2} />
    </span>
  ),
  figures: true,
  value: (link) => (isLost(link) ? null : link.share),
  cell: (link) => (link.share === null || isLost(link) ? '–' : formatShare(link.share)),
}

/** What it delivers in time, 1 for everything. */
export const WEIGHT: Column<OverlayLink> = {
  id: 'delivered',
  header: 'weight',
  figures: true,
  value: (link) => (isLost(link) ? 'lost' : link.weight),
  cell: (link) => (isLost(link) ? 'lost' : link.weight.toFixed(2)),
}
