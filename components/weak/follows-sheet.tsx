'use client'

import { type Column, DataTable, EmptyState, Note, Sheet } from '@/components/ui'
import type { WeakPlace } from '@/lib/data/weak-dto'
import { type FollowedLabel, followsSentence, leftOutText, pText } from '@/lib/face/weak'

/** Which label the sides follow: the first thing to know about a cause. */
export function FollowsSheet({ slug, place }: { slug: string; place: WeakPlace }) {
  const { follows, sides } = place
  if (!sides) return null
  const leftOut = leftOutText(follows)
  return (
    <Sheet heading="What the cut follows" aside={`${follows.nodes} nodes on a side`}>
      <div className="space-y-3">
        <p className="font-semibold">{followsSentence(follows)}</p>
        {follows.nodes > 0 ? (
          <DataTable
            caption="Labels by how much they tell of the side a node is on"
            columns={COLUMNS}
            rows={follows.labels}
            rowKey={({ key }) => key}
            csvName={`${slug}-follows`}
            stacks
            empty={
              <EmptyState title="No label to compare with.">
                Give agents labels when they enrol: office, region, provider, power supply.
              </EmptyState>
            }
          />
        ) : null}
        {leftOut ? <p className="text-sm text-soft">{leftOut}</p> : null}
        {follows.labels.length > 0 ? (
          <Note>
            1 where each value lies wholly on one side, 0 where the label says no more than chance: adjusted
            mutual information. By chance: how often sides dealt out at random say as much, of{' '}
            {follows.labels[0]?.permutations} draws; each label is tested by itself, so of many one may stand
            out. Nodes without the label are left out of its row.
          </Note>
        ) : null}
      </div>
    </Sheet>
  )
}

const COLUMNS: Column<FollowedLabel>[] = [
  { id: 'key', header: 'label', value: ({ key }) => key },
  {
    id: 'adjusted',
    header: 'tells',
    figures: true,
    value: ({ adjusted }) => Number(adjusted.toFixed(4)),
    cell: ({ adjusted }) =>
      adjusted
        .toFixed(2)
        .replace(/^-0\.00$/, '0.00')
        .replace('-', '−'),
  },
  {
    id: 'p',
    header: 'by chance',
    figures: true,
    value: ({ p }) => p,
    cell: pText,
  },
  { id: 'values', header: 'values', figures: true, value: ({ values }) => values },
  { id: 'unlabelled', header: 'nodes without', figures: true, value: ({ unlabelled }) => unlabelled },
]
