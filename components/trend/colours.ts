'use client'

import { useSyncExternalStore } from 'react'

/** What a canvas needs of the sheet: colours and families as they stand in the style sheet now. */
export interface Ink {
  ink: string
  soft: string
  hairline: string
  sheet: string
  wash: string
  vermilion: string
  figures: string
  text: string
}

function subscribe(changed: () => void): () => void {
  const media = matchMedia('(prefers-color-scheme: dark)')
  const observer = new MutationObserver(changed)
  media.addEventListener('change', changed)
  observer.observe(document.documentElement, { attributes: true, attributeFilter: ['data-sheet'] })
  return () => {
    media.removeEventListener('change', changed)
    observer.disconnect()
  }
}

function snapshot(): string {
  const night = matchMedia('(prefers-color-scheme: dark)').matches
  return document.documentElement.dataset.sheet ?? (night ? 'night' : 'day')
}

/** Which sheet is laid out; changes when it does. */
export function useSheetName(): string | null {
  return useSyncExternalStore<string | null>(subscribe, snapshot, () => null)
}

export function readInk(): Ink {
  const style = getComputedStyle(document.documentElement)
  const get = (name: string) => style.getPropertyValue(name).trim()
  return {
    ink: get('--ink'),
    soft: get('--ink-soft'),
    hairline: get('--hairline'),
    sheet: get('--sheet'),
    wash: get('--wash'),
    vermilion: get('--vermilion'),
    figures: get('--font-mono-latin') || 'monospace',
    text: get('--font-text-latin') || 'sans-serif',
  }
}
