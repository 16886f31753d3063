'use client'

import { useRouter } from 'next/navigation'
import { Button, type ButtonKind, Outcome } from '@/components/ui'
import type { NewRehearsal, RehearsalDto } from '@/lib/data/rehearsal-dto'
import { rehearsalPage } from '@/lib/face/rehearsal'
import type { RehearsalAction } from './types'
import { useAct } from './use-act'

/** Asks nothing: it can be rehearsed again at any time. */
export function CancelButton(props: {
  slug: string
  id: string
  cancel: RehearsalAction
  onDone: () => void
}) {
  const { slug, id, cancel, onDone } = props
  const { busy, failed, run } = useAct(cancel, onDone)
  return (
    <>
      <Button busy={busy} busyLabel="Cancelling…" onClick={() => run({ slug, id })}>
        Cancel
      </Button>
      {failed ? <Outcome ok={false}>{failed}</Outcome> : null}
    </>
  )
}

/** The same once more, at once. */
export function RepeatButton(props: {
  slug: string
  rehearsal: RehearsalDto
  start: RehearsalAction
  kind?: ButtonKind
}) {
  const { slug, rehearsal, start, kind } = props
  const router = useRouter()
  const { busy, failed, run } = useAct(start, ({ id }) => router.push(rehearsalPage(slug, id)))
  const { exclude, note, incident } = rehearsal
  const again: NewRehearsal = { exclude, note, incident, startsAt: null }
  return (
    <>
      <Button
        kind={kind}
        busy={busy}
        busyLabel="Starting…"
        onClick={() => run({ slug, rehearsal: JSON.stringify(again) })}
      >
        Repeat it
      </Button>
      {failed ? <Outcome ok={false}>{failed}</Outcome> : null}
    </>
  )
}
