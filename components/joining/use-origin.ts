'use client'

import { useSyncExternalStore } from 'react'

/** Scheme and host of this page as the reader's browser has them; null while rendering on the server. */
export function useOrigin(): string | null {
  return useSyncExternalStore<string | null>(
    () => () => {},
    () => location.origin,
    () => null,
  )
}
