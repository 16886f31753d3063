'use client'

import { useMemo, useState } from 'react'
import { Button, SelectField } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import { labelKeysOf } from '@/lib/face/node-columns'

/** All links between two values of a label. */
export function PairFields({
  nodes,
  onAdd,
}: {
  nodes: readonly OverlayNode[]
  onAdd: (between: Excluded['between'][number]) => void
}) {
  const keys = useMemo(() => labelKeysOf(nodes), [nodes])
  const [chosenKey, setKey] = useState<string | null>(null)
  const key = chosenKey ?? keys[0] ?? null
  const values = useMemo(
    () => [...new Set(nodes.flatMap(({ labels }) => (key === null ? [] : (labels[key] ?? []))))].sort(),
    [nodes, key],
  )
  const [ends, setEnds] = useState<{ a: string | null; b: string | null }>({ a: null, b: null })
  const a = ends.a ?? values[0] ?? null
  const b = ends.b ?? values[1] ?? null
  const options = values.map((value) => ({ value, label: value }))
  if (key === null || values.length === 0) return <p className="text-soft">The nodes have no labels.</p>
  return (
    <div className="flex flex-wrap items-end gap-3">
      <SelectField
        label="Label"
        options={keys.map((one) => ({ value: one, label: one }))}
        value={key}
        onChange={(event) => {
          setKey(event.target.value)
          setEnds({ a: null, b: null })
        }}
        className="min-w-32"
      />
      <SelectField
        label="From"
        options={options}
        value={a ?? ''}
        onChange={(event) => setEnds({ a: event.target.value, b })}
        className="min-w-36"
      />
      <SelectField
        label="To"
        options={options}
        value={b ?? ''}
        onChange={(event) => setEnds({ a, b: event.target.value })}
        className="min-w-36"
      />
      <Button
        disabled={a === null || b === null}
        onClick={() => a !== null && b !== null && onAdd({ key, a, b })}
      >
        Take the links between
      </Button>
    </div>
  )
}
