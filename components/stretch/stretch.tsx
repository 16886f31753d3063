'use client'

import { useCallback, useMemo, useRef, useState } from 'react'
import { Button, SideMark } from '@/components/ui'
import type { Cut, OverlayLink, OverlayNode, Reading } from '@/lib/data/dto'
import { cx } from '@/lib/face/cx'
import { formatCount } from '@/lib/face/format'
import { laneKeys, layoutStretch } from '@/lib/face/stretch'
import { drawsSides, gapText, nodeReadout, stretchSentence } from '@/lib/face/stretch-sentence'
import { Drawing } from './drawing'
import { StretchTable } from './stretch-table'
import { useWidth } from './use-width'

export interface StretchProps {
  nodes: readonly OverlayNode[]
  links: readonly OverlayLink[]
  reading: Reading | null
  cut: Cut | null
}

const GONE = new Set(['left', 'revoked'])

export function Stretch({ nodes: all, links, reading, cut }: StretchProps) {
  const frame = useRef<HTMLDivElement>(null)
  const width = useWidth(frame)
  const [lane, setLane] = useState<string | null>(null)
  const [asTable, setAsTable] = useState(false)
  const [chosen, setChosen] = useState<string | null>(null)

  const nodes = useMemo(() => all.filter((n) => !GONE.has(n.state)), [all])
  // Lanes stay as they are when a cut that followed a label closes again.
  const [followed, setFollowed] = useState<string | null>(null)
  const follows = cut?.follows?.key ?? followed
  if (follows !== followed) setFollowed(follows)
  const keys = useMemo(() => laneKeys(nodes, follows), [nodes, follows])
  const laneKey = lane === '' ? null : lane !== null && keys.includes(lane) ? lane : (keys[0] ?? null)
  const sided = drawsSides(nodes, cut?.sides ?? reading?.sides ?? null)
  const silent = reading?.treatAsSplit ?? false
  const crossingLinks = cut?.crossingLinks ?? reading?.crossingLinks ?? null

  const layout = useMemo(
    () =>
      width === null
        ? null
        : layoutStretch({ nodes, links, laneKey, sided, crossingLinks, silent, width: Math.max(260, width) }),
    [nodes, links, laneKey, sided, crossingLinks, silent, width],
  )
  const walked = useMemo(() => {
    const byName = new Map(nodes.map((n) => [n.name, n]))
    return layout?.dots.flatMap((d) => byName.get(d.node.name) ?? []) ?? []
  }, [layout, nodes])
  const gap = gapText(reading, cut, silent)
  const choose = useCallback((name: string | null) => setChosen(name), [])

  return (
    <div>
      <div className="mb-3 flex flex-wrap items-center gap-x-5 gap-y-2">
        <label className="flex items-center gap-2 text-sm text-soft">
          lanes by
          <select
            value={laneKey ?? ''}
            onChange={(e) => setLane(e.target.value)}
            className="min-h-9 max-w-44 border border-edge bg-sheet px-2 text-ink"
          >
            {keys.map((k) => (
              <option key={k} value={k}>
                {k}
              </option>
            ))}
            <option value="">nothing</option>
          </select>
        </label>
        <Button
          kind="quiet"
          className="-mr-2 ml-auto text-sm"
          onClick={() => setAsTable((t) => !t)}
          aria-pressed={asTable}
        >
          {asTable ? 'Show the drawing' : 'Show as a table'}
        </Button>
      </div>
      {asTable ? (
        <StretchTable nodes={nodes} sided={sided} />
      ) : (
        <>
          {sided ? <SidesLine nodes={nodes} gap={gap.text} grave={gap.grave} /> : null}
          <div ref={frame} className="min-h-80 overflow-hidden">
            {layout ? (
              <Drawing
                layout={layout}
                sentence={stretchSentence(nodes, sided, gap, laneKey)}
                chosen={chosen}
                onChoose={choose}
              />
            ) : null}
          </div>
          <Walk nodes={walked} sided={sided} chosen={chosen} onChoose={choose} />
        </>
      )}
    </div>
  )
}

export function SidesLine({
  nodes,
  gap,
  grave,
}: {
  nodes: readonly OverlayNode[]
  gap: string
  grave: boolean
}) {
  const text = (side: 'a' | 'b') => {
    const on = nodes.filter((n) => n.side === side)
    const unheard = on.filter((n) => n.state === 'unheard').length
    const tail = unheard === 0 ? '' : unheard === on.length ? ', unheard' : `, ${unheard} unheard`
    return `${formatCount(on.length, 'node')}${tail}`
  }
  return (
    <div className="mb-2 grid grid-cols-2 items-baseline gap-x-4 text-sm font-semibold sm:grid-cols-[1fr_auto_1fr]">
      <SideMark side="a">{text('a')}</SideMark>
      <span
        className={cx(
          'order-last col-span-2 text-center font-normal sm:order-none sm:col-span-1',
          grave ? 'text-vermilion' : 'text-soft',
        )}
      >
        {gap}
      </span>
      <span className="text-right">
        <SideMark side="b">{text('b')}</SideMark>
      </span>
    </div>
  )
}

/** A slider over the nodes from left to right: keyboard, touch and screen readers walk the drawing with it. */
export function Walk(props: {
  nodes: readonly OverlayNode[]
  sided: boolean
  chosen: string | null
  onChoose: (name: string | null) => void
}) {
  const { nodes, sided, chosen, onChoose } = props
  if (nodes.length === 0) return null
  const at = nodes.findIndex((n) => n.name === chosen)
  const node = nodes[at]
  const readout = node ? nodeReadout(node, sided) : ''
  return (
    <div className="mt-3 flex flex-wrap items-center gap-x-4 gap-y-1 border-t border-hairline pt-3 text-sm">
      <label className="flex items-center gap-2 text-soft">
        walk
        <input
          type="range"
          min={0}
          max={nodes.length - 1}
          value={Math.max(0, at)}
          onChange={(e) => onChoose(nodes[Number(e.target.value)]?.name ?? null)}
          onFocus={() => onChoose(chosen ?? nodes[0]?.name ?? null)}
          aria-label="Walk the nodes from left to right"
          aria-valuetext={readout || 'no node chosen'}
          className="w-32 accent-(--ink)"
        />
      </label>
      <p className="min-h-6 min-w-0 flex-1 basis-60 break-words">
        {readout || <span className="text-soft">Point at a node, or walk them from left to right.</span>}
      </p>
    </div>
  )
}
