'use client'

import { type ReactNode, useState } from 'react'
import { Button } from '@/components/ui'
import { submit } from '@/lib/http/form-state'
import type { Action } from './types'

/** One press, and what came of it beside the button. */
export function ActButton<T>({
  action,
  fields,
  done,
  children,
}: {
  action: Action<T>
  fields: Record<string, string>
  done: string
  children: ReactNode
}) {
  const [busy, setBusy] = useState(false)
  const [said, setSaid] = useState('')
  async function act() {
    setBusy(true)
    const state = await submit(action, fields).catch(() => null)
    setBusy(false)
    if (state === null) setSaid('The server could not be reached. Try again.')
    else setSaid(state.status === 'failed' ? state.problem.detail : done)
  }
  return (
    <span className="inline-flex flex-wrap items-center gap-2">
      <Button kind="quiet" busy={busy} onClick={act}>
        {children}
      </Button>
      <span role="status" className="text-sm">
        {said}
      </span>
    </span>
  )
}

/** For ConfirmDialog: what went wrong, or null. */
export async function outcomeOf<T>(
  action: Action<T>,
  fields: Record<string, string>,
): Promise<string | null> {
  const state = await submit(action, fields)
  return state.status === 'failed' ? state.problem.detail : null
}
