'use client'

import { ConfirmDialog } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'
import { submit } from '@/lib/http/form-state'
import type { NodeAction, NodeActions } from './types'

export interface NodeActionButtonsProps {
  slug: string
  node: OverlayNode
  actions: NodeActions
  onDone: () => void
}

/** What can be done to a node by those who may; each asks, naming what goes. */
export function NodeActionButtons({ slug, node, actions, onDone }: NodeActionButtonsProps) {
  const { name, state } = node
  const run = (action: NodeAction) => async () => {
    const result = await submit(action, { slug, name })
    if (result.status === 'failed') return result.problem.detail
    onDone()
    return null
  }
  const links = formatCount(node.degree ?? 0, 'link')
  if (state === 'left')
    return (
      <p className="max-w-2xl text-soft">
        {name} has left and is not counted. To take it back, enrol its agent again with a joining code; the
        name is free.
      </p>
    )
  return (
    <div className="flex flex-wrap gap-2">
      {state === 'revoked' ? (
        <p className="w-full max-w-2xl text-soft">
          The key of {name} is refused for good. Retire it to free its name: then its node can come back with
          a new key and a joining code.
        </p>
      ) : null}
      {state === 'left-out' ? (
        <ConfirmDialog
          label="Readmit"
          title={`Readmit ${name}?`}
          confirmLabel={`Readmit ${name}`}
          keepLabel="Leave it out"
          onConfirm={run(actions.readmit)}
        >
          {node.leftOutBecause ? (
            <p>
              It was left out because: <strong>{node.leftOutBecause}</strong>
            </p>
          ) : null}
          <p>
            Its neighbours link to it again and the reading counts what it says. If the cause was not found
            and mended, the reading will be wrong until it is left out once more.
          </p>
        </ConfirmDialog>
      ) : null}
      <ConfirmDialog
        label="Retire"
        title={`Retire ${name}?`}
        confirmLabel={`Retire ${name}`}
        keepLabel="Keep it"
        onConfirm={run(actions.retire)}
      >
        <p>
          For a node that is gone for good: {name} is not counted any more, and its {links} shut. An agent
          that still runs there stops.
        </p>
        <p className="text-soft">
          To take it back, its agent enrols again with a joining code. What it reported stays in the history.
        </p>
      </ConfirmDialog>
      {state === 'revoked' ? null : (
        <ConfirmDialog
          label="Revoke"
          title={`Revoke ${name}?`}
          confirmLabel={`Revoke ${name}`}
          keepLabel="Keep it"
          onConfirm={run(actions.revoke)}
        >
          <p>
            For a key in wrong hands: the key of {name} is refused from now on, its reports at once, its{' '}
            {links} as soon as its neighbours hear of it, within one report interval. This cannot be undone.
          </p>
          <p className="text-soft">
            Its node can come back with a new key and a joining code, once it is retired here.
          </p>
        </ConfirmDialog>
      )}
    </div>
  )
}
