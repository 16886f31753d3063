'use client'

import { useState } from 'react'
import { Button, Field, inputClass } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'
import { type Pasted, readPasted } from '@/lib/face/rehearsal'

/** So many errors are told one by one. */
const TOLD = 8

/** A list from elsewhere: what is known is taken, what is not is told line by line and stays to be put right. */
export function PasteNames({
  nodes,
  onNames,
}: {
  nodes: readonly OverlayNode[]
  onNames: (names: readonly string[]) => void
}) {
  const [text, setText] = useState('')
  const [pasted, setPasted] = useState<Pasted | null>(null)

  function take() {
    const read = readPasted(text, nodes)
    setPasted(read)
    onNames(read.names)
    setText(read.errors.map((error) => error.text).join('\n'))
  }

  return (
    <div className="space-y-2">
      <Field
        label="Paste names"
        hint="One a line, or with commas or spaces between them."
        error={pasted && pasted.errors.length > 0 ? <Errors pasted={pasted} /> : null}
      >
        {(control) => (
          <textarea
            {...control}
            rows={3}
            spellCheck={false}
            value={text}
            onChange={(event) => setText(event.target.value)}
            className={`${inputClass} font-figures`}
          />
        )}
      </Field>
      <div className="flex flex-wrap items-center gap-3">
        <Button onClick={take} disabled={text.trim() === ''}>
          Take these nodes
        </Button>
        <p role="status" className="text-sm text-soft">
          {pasted ? `${formatCount(pasted.names.length, 'node')} taken.` : ''}
        </p>
      </div>
    </div>
  )
}

function Errors({ pasted: { errors } }: { pasted: Pasted }) {
  return (
    <>
      {errors.slice(0, TOLD).map(({ line, text, because }) => (
        <span key={`${line} ${text}`} className="block wrap-anywhere">
          Line {line}, {text}: {because}.
        </span>
      ))}
      {errors.length > TOLD ? (
        <span className="block">And {errors.length - TOLD} more, which stay in the box.</span>
      ) : null}
    </>
  )
}
