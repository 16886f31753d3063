'use client'

import Link from 'next/link'
import { Dialog, DialogActions, SideMark, Time } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'
import { nodeConcerns } from '@/lib/face/node-concerns'
import { nodeDetails } from '@/lib/face/node-details'
import { overlayPageUrls } from '@/lib/face/urls'
import { NodeActionButtons } from './node-actions'
import { STATE_WORDS, StateMark } from './state-mark'
import type { NodeActions } from './types'

export interface NodeSheetProps {
  slug: string
  node: OverlayNode
  /** Null for those who may only look. */
  actions: NodeActions | null
  onClose: () => void
  /** Something was done to the node. */
  onDone: () => void
}

/** All that is known of one node. */
export function NodeSheet({ slug, node, actions, onClose, onDone }: NodeSheetProps) {
  const concerns = nodeConcerns(node)
  return (
    <Dialog open onOpenChange={onClose} title={node.name}>
      <div className="space-y-5">
        <Standing node={node} />
        {concerns.length > 0 ? (
          <div className="border-2 border-ink bg-sheet px-4 py-2.5">
            <h3 className="font-text text-sm font-semibold">To look at</h3>
            <ul>
              {concerns.map((concern) => (
                <li key={concern}>{concern}</li>
              ))}
            </ul>
          </div>
        ) : null}
        {nodeDetails(node).map(({ heading, details }) => (
          <section key={heading}>
            <h3 className="mb-1 text-base">{heading}</h3>
            <dl>
              {details.map(({ label, value, remark }) => (
                <div key={label} className="flex gap-4 border-t border-hairline py-1.5">
                  <dt className="w-32 shrink-0 text-sm leading-6 text-soft sm:w-40">{label}</dt>
                  <dd className="min-w-0 wrap-anywhere">
                    {value}
                    {remark ? <span className="block text-sm text-soft">{remark}</span> : null}
                  </dd>
                </div>
              ))}
            </dl>
          </section>
        ))}
        {node.partner ? (
          <p className="text-sm text-soft">
            It is another team’s node: its own name and how its agent fares stay with that team. The name here
            is the one your team knows it by.
          </p>
        ) : node.health === null || node.health === undefined ? (
          <p className="text-sm text-soft">
            {node.heardAt === null
              ? 'Nothing has been heard of its agent yet.'
              : 'Its agent is of version 1 and says nothing of its clock, its neighbours’ source or its errors.'}
          </p>
        ) : null}
        <p>
          <Link href={overlayPageUrls(slug).node(node.name)} className="rule-link">
            History, neighbours and incidents of {node.name}
          </Link>
        </p>
        {actions ? (
          <section>
            <h3 className="mb-2 text-base">What can be done</h3>
            <NodeActionButtons slug={slug} node={node} actions={actions} onDone={onDone} />
          </section>
        ) : null}
      </div>
      <DialogActions closeLabel="Close" />
    </Dialog>
  )
}

function Standing({ node }: { node: OverlayNode }) {
  const labels = Object.entries(node.labels)
  return (
    <div className="space-y-1">
      <p className="flex flex-wrap gap-x-5 gap-y-1">
        <StateMark state={node.state} />
        {node.side ? <SideMark side={node.side} /> : null}
        {labels.map(([key, value]) => (
          <span key={key} className="wrap-anywhere">
            <span className="text-soft">{key}</span> {value}
          </span>
        ))}
      </p>
      <p className="text-sm text-soft">
        {node.heardAt ? (
          <>
            last heard <Time at={node.heardAt} show="both" />
          </>
        ) : (
          'never heard'
        )}
        {node.joinedAt ? (
          <>
            {' · '}joined <Time at={node.joinedAt} show="moment" />
          </>
        ) : null}
        {node.endedAt ? (
          <>
            {' · '}
            {STATE_WORDS[node.state]} since <Time at={node.endedAt} show="both" />
          </>
        ) : null}
      </p>
    </div>
  )
}
