'use client'

import { useState } from 'react'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { submit } from '@/lib/http/form-state'
import type { RehearsalAction } from './types'

/** A button's action: under way or not, and what went wrong. */
export function useAct(act: RehearsalAction, onDone: (rehearsal: RehearsalDto) => void) {
  const [busy, setBusy] = useState(false)
  const [failed, setFailed] = useState<string | null>(null)
  async function run(fields: Record<string, string>) {
    setBusy(true)
    setFailed(null)
    const state = await submit(act, fields).catch(() => null)
    setBusy(false)
    if (state?.status === 'done') return onDone(state.value)
    setFailed(
      state?.status === 'failed' ? state.problem.detail : 'The server could not be reached. Try again.',
    )
  }
  return { busy, failed, run }
}
