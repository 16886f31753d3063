'use client'

import { useState } from 'react'
import { SHEET_CHOICES, type SheetChoice, sheetCookie } from '@/lib/face/sheet-choice'

const LABELS: Record<SheetChoice, string> = { system: 'as the system', day: 'day', night: 'night' }

export function SheetSwitch({ initial }: { initial: SheetChoice }) {
  const [choice, setChoice] = useState(initial)

  function choose(next: SheetChoice) {
    setChoice(next)
    // biome-ignore lint/suspicious/noDocumentCookie: the Cookie Store API is not in every browser
    document.cookie = sheetCookie(next)
    if (next === 'system') delete document.documentElement.dataset.sheet
    else document.documentElement.dataset.sheet = next
  }

  return (
    <label className="block text-sm text-soft">
      <span className="mb-0.5 block">Sheet</span>
      <select
        value={choice}
        onChange={(e) => choose(SHEET_CHOICES.find((c) => c === e.target.value) ?? 'system')}
        className="min-h-8 w-full max-w-36 border border-edge bg-paper px-1 text-ink"
      >
        {SHEET_CHOICES.map((c) => (
          <option key={c} value={c}>
            {LABELS[c]}
          </option>
        ))}
      </select>
    </label>
  )
}
