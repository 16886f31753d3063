'use client'

import { useEffect, useRef } from 'react'
import { Button, CommandBlock, Time } from '@/components/ui'
import type { CreatedJoiningCode } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'

/** The one time a code is seen. */
export function CreatedCode({ code, onDone }: { code: CreatedJoiningCode; onDone: () => void }) {
  const top = useRef<HTMLElement>(null)
  useEffect(() => {
    top.current?.focus()
  }, [code.id])
  return (
    <section
      ref={top}
      tabIndex={-1}
      aria-labelledby="created-code"
      className="border-2 border-ink bg-sheet px-4 py-5 outline-none sm:px-6"
    >
      <h2 id="created-code" className="text-lg">
        The code, shown this once
      </h2>
      <p className="mt-1 mb-4 max-w-2xl text-soft">
        Only its fingerprint is kept. It is good for {formatCount(code.uses, 'agent')} and closes at{' '}
        <Time at={code.expiresAt} show="both" />. The commands below have it in its place.
      </p>
      <CommandBlock label="Joining code" text={code.code} />
      <div className="mt-5">
        <Button onClick={onDone}>I have it, hide the code</Button>
      </div>
    </section>
  )
}
