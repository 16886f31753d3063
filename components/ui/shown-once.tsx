'use client'

import { type ReactNode, useEffect, useId, useRef } from 'react'
import { Button } from './button'
import { CommandBlock } from './command-block'

export interface ShownOnceProps {
  heading: string
  /** What the text is, for its copy button and for screen readers. */
  label: string
  text: string
  /** What it is good for, until when, and where it goes. */
  children: ReactNode
  onDone: () => void
}

/** The one time a secret is seen. Takes the focus when it appears, and again for another one. */
export function ShownOnce({ heading, label, text, children, onDone }: ShownOnceProps) {
  const id = useId()
  const top = useRef<HTMLElement>(null)
  useEffect(() => {
    top.current?.focus()
  }, [text])
  return (
    <section
      ref={top}
      tabIndex={-1}
      aria-labelledby={id}
      className="border-2 border-ink bg-sheet px-4 py-5 outline-none sm:px-6"
    >
      <h2 id={id} className="text-lg">
        {heading}
      </h2>
      <p className="mt-1 mb-4 max-w-2xl text-soft">Only its fingerprint is kept. {children}</p>
      <CommandBlock label={label} text={text} />
      <div className="mt-5">
        <Button onClick={onDone}>I have it, hide the code</Button>
      </div>
    </section>
  )
}
