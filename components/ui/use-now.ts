'use client'

import { useSyncExternalStore } from 'react'

// One timer for the page, however many ages it shows.
let nowMs = 0
let timer: ReturnType<typeof setInterval> | null = null
const listeners = new Set<() => void>()

function subscribe(listener: () => void): () => void {
  listeners.add(listener)
  if (!timer) {
    nowMs = Date.now()
    timer = setInterval(() => {
      nowMs = Date.now()
      for (const l of listeners) l()
    }, 1000)
  }
  return () => {
    listeners.delete(listener)
    if (listeners.size === 0 && timer) {
      clearInterval(timer)
      timer = null
    }
  }
}

function snapshot(): number {
  if (!timer) nowMs = Math.floor(Date.now() / 1000) * 1000
  return nowMs
}

/** Milliseconds since the epoch, refreshed each second; null while rendering on the server. */
export function useNow(): number | null {
  return useSyncExternalStore<number | null>(subscribe, snapshot, () => null)
}
