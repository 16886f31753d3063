'use client'

import { useEffect, useId, useState } from 'react'
import { Button } from './button'

export interface CommandBlockProps {
  /** What the text is: "Enrol the agent". */
  label: string
  text: string
}

/** Text to carry elsewhere: shown whole, copied with one press. */
export function CommandBlock({ label, text }: CommandBlockProps) {
  const id = useId()
  const [said, setSaid] = useState('')

  useEffect(() => {
    if (!said) return
    const timer = setTimeout(() => setSaid(''), 4000)
    return () => clearTimeout(timer)
  }, [said])

  async function copy() {
    try {
      await navigator.clipboard.writeText(text)
      setSaid('Copied')
    } catch {
      // Browsers refuse the clipboard on plain http away from localhost: mark the text for the keyboard.
      const node = document.getElementById(id)
      if (node) getSelection()?.selectAllChildren(node)
      setSaid('Marked: press Ctrl+C')
    }
  }

  return (
    <figure aria-labelledby={`${id}-label`} className="min-w-0 border border-edge bg-sheet">
      <div className="flex flex-wrap items-center justify-between gap-2 border-b border-hairline py-1 pr-1 pl-3">
        <span id={`${id}-label`} className="min-w-0 text-sm text-soft">
          {label}
        </span>
        <span className="ml-auto flex items-center gap-2">
          <span role="status" className="text-sm">
            {said}
          </span>
          <Button kind="quiet" onClick={copy} aria-label={`Copy: ${label}`}>
            Copy
          </Button>
        </span>
      </div>
      <pre
        id={id}
        // biome-ignore lint/a11y/noNoninteractiveTabindex: a scrolling region must be reachable by keyboard
        tabIndex={0}
        className="max-h-96 overflow-auto px-3 py-2.5 font-figures text-sm leading-6 wrap-anywhere whitespace-pre-wrap"
      >
        {text}
      </pre>
    </figure>
  )
}
