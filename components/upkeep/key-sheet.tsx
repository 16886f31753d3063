'use client'

import { useSigningKey } from '@/components/live/hooks'
import { ConfirmDialog, FailedState, Note, Sheet, Time, Waiting } from '@/components/ui'
import { type Role, roleReaches } from '@/lib/auth/permissions'
import type { SigningKey } from '@/lib/data/dto'
import { keyText, rotationText } from '@/lib/face/upkeep'
import { submit } from '@/lib/http/form-state'
import type { RotateAction } from './types'

export interface KeySheetProps {
  slug: string
  role: Role
  rotate: RotateAction
}

export function KeySheet({ slug, role, rotate }: KeySheetProps) {
  const may = roleReaches(role, 'operator')
  const key = useSigningKey(may ? slug : null)
  return (
    <Sheet heading="Signing key" aside={key.data ? `keys, version ${key.data.ringVersion}` : null}>
      {!may ? (
        <Note>Operators and owners see the key that signs for this overlay.</Note>
      ) : key.data ? (
        <div className="space-y-5">
          <p className="max-w-3xl text-soft">
            This server signs orders, upgrades and the passes of agents with it; agents take none that another
            key signed. It is replaced without a pause: the key to come is told to every agent first.
          </p>
          <Keys signingKey={key.data} />
          <Rotation slug={slug} signingKey={key.data} role={role} rotate={rotate} onDone={key.retry} />
        </div>
      ) : key.error ? (
        <FailedState quiet title="The signing key could not be loaded." onRetry={key.retry}>
          {key.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the signing key" className="h-32" />
      )}
    </Sheet>
  )
}

function Keys({ signingKey }: { signingKey: SigningKey }) {
  const { publicKey, since, next, previous } = signingKey
  const rows = [
    {
      label: 'in force',
      key: publicKey,
      remark: (
        <>
          since <Time at={since} show="both" />
        </>
      ),
    },
    next && {
      label: 'to come',
      key: next.publicKey,
      remark: (
        <>
          {rotationText(next)} It takes over as soon as all do, at the latest{' '}
          <Time at={next.takesOverAt} show="both" />.
        </>
      ),
    },
    previous && {
      label: 'before',
      key: previous.publicKey,
      remark: (
        <>
          good until <Time at={previous.until} show="both" />, when the last pass under it has ended
        </>
      ),
    },
  ].filter((row) => row !== null)
  return (
    <dl className="max-w-3xl">
      {rows.map((row) => (
        <div key={row.label} className="border-t border-hairline py-2 sm:flex sm:gap-5">
          <dt className="w-24 shrink-0 text-sm leading-6 text-soft">{row.label}</dt>
          <dd className="min-w-0">
            <span className="block font-figures text-sm leading-6 wrap-anywhere">{keyText(row.key)}</span>
            <span className="block text-sm text-soft">{row.remark}</span>
          </dd>
        </div>
      ))}
    </dl>
  )
}

function Rotation(props: {
  slug: string
  signingKey: SigningKey
  role: Role
  rotate: RotateAction
  onDone: () => void
}) {
  const { slug, signingKey, role, rotate, onDone } = props
  if (signingKey.next) return <Note>A rotation is under way; another can begin when it is over.</Note>
  if (!roleReaches(role, 'owner')) return <Note>Owners of the team replace the key.</Note>
  return (
    <ConfirmDialog
      label="Replace the key"
      title="Replace the signing key?"
      confirmLabel="Replace the key"
      keepLabel="Keep the key"
      onConfirm={async () => {
        const state = await submit(rotate, { slug })
        if (state.status === 'failed') return state.problem.detail
        onDone()
        return null
      }}
    >
      <p>
        A key to come is made now and told to every agent with its next report. It takes over when all hold
        it. The key in force then goes, for good.
      </p>
      <p>
        An agent that is away from then on until passes under the old key have ended must reach this server
        before its links open again. Nothing else stops.
      </p>
    </ConfirmDialog>
  )
}
