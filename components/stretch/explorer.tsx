'use client'

import Link from 'next/link'
import { useRouter } from 'next/navigation'
import { type KeyboardEvent, type RefObject, useEffect, useMemo, useRef, useState } from 'react'
import { cx } from '@/lib/face/cx'
import { findNodes, laneKeys, layoutStretch, type StretchLayout, stepOf, walkFrom } from '@/lib/face/stretch'
import { drawsSides, gapText, stretchSentence } from '@/lib/face/stretch-sentence'
import { Drawing } from './drawing'
import { ExplorerTools } from './explorer-tools'
import { SidesLine, type StretchProps, Walk } from './stretch'
import { StretchTable } from './stretch-table'
import { useWidth } from './use-width'
import { useZoom } from './use-zoom'

export interface ExplorerProps extends StretchProps {
  /** Label that lanes are made by at first. */
  follows: string | null
  nodeHref: (name: string) => string
  /** Comes to hold what is drawn. */
  drawing: RefObject<HTMLDivElement | null>
}

const NOT_DRAWN = new Set(['left', 'revoked'])
/** A node walked to is brought this far inside the frame. */
const INSIDE_PX = 60
const KEYS_HELP =
  'Arrow keys walk the nodes, up and down to the next lane, Enter opens one, plus and minus zoom, 0 shows the whole.'

/** The stretch view to look into: zoom, search, and a walk by keyboard that is read out. */
export function Explorer({ nodes: all, links, reading, cut, follows, nodeHref, drawing }: ExplorerProps) {
  const router = useRouter()
  const frame = useRef<HTMLDivElement>(null)
  const width = useWidth(frame)
  const zoom = useZoom(drawing)
  const [lane, setLane] = useState<string | null>(null)
  const [asTable, setAsTable] = useState(false)
  const [chosen, setChosen] = useState<string | null>(null)
  const [pointed, setPointed] = useState<string | null>(null)
  const [search, setSearch] = useState('')

  const nodes = useMemo(() => all.filter((node) => !NOT_DRAWN.has(node.state)), [all])
  const keys = useMemo(() => laneKeys(nodes, follows), [nodes, follows])
  const laneKey = lane === '' ? null : lane !== null && keys.includes(lane) ? lane : (keys[0] ?? null)
  const sided = drawsSides(nodes, cut?.sides ?? null)
  const silent = reading?.treatAsSplit ?? false
  const crossingLinks = cut?.crossingLinks ?? null
  const drawn = Math.max(260, Math.floor((width ?? 0) * zoom.zoom))
  const layout = useMemo(
    () =>
      width === null
        ? null
        : layoutStretch({ nodes, links, laneKey, sided, crossingLinks, silent, width: drawn }),
    [nodes, links, laneKey, sided, crossingLinks, silent, width, drawn],
  )
  const walked = useMemo(() => {
    const byName = new Map(nodes.map((node) => [node.name, node]))
    return layout?.dots.flatMap((dot) => byName.get(dot.node.name) ?? []) ?? []
  }, [layout, nodes])
  const matches = useMemo(() => (layout ? findNodes(layout.dots, search) : []), [layout, search])
  const gap = gapText(reading, cut, silent)

  const x = layout?.dots.find((dot) => dot.node.name === chosen)?.x
  useEffect(() => {
    const element = drawing.current
    if (!element || x === undefined) return
    const { scrollLeft, clientWidth } = element
    if (x < scrollLeft + INSIDE_PX || x > scrollLeft + clientWidth - INSIDE_PX)
      element.scrollLeft = x - clientWidth / 2
  }, [x, drawing])

  function seek(text: string) {
    setSearch(text)
    const [first] = layout ? findNodes(layout.dots, text) : []
    if (first !== undefined) setChosen(first)
  }

  function next() {
    setChosen(matches[(matches.indexOf(chosen ?? '') + 1) % matches.length] ?? chosen)
  }

  function onKeyDown(event: KeyboardEvent<HTMLDivElement>) {
    if (!layout || event.ctrlKey || event.metaKey || event.altKey) return
    const step = stepOf(event.key)
    if (step) setChosen(walkFrom(layout, chosen, step))
    else if (event.key === '+' || event.key === '=') zoom.by(1)
    else if (event.key === '-') zoom.by(-1)
    else if (event.key === '0') zoom.whole()
    else if (event.key === 'Escape') setChosen(null)
    else if (event.key === 'Enter' && chosen !== null) router.push(nodeHref(chosen))
    else return
    event.preventDefault()
  }

  return (
    <div>
      <ExplorerTools
        {...{ keys, laneKey, zoom, asTable, search }}
        onLane={setLane}
        onSearch={seek}
        onNext={next}
        found={search.trim() === '' ? null : matches.length === 0 ? 'none' : `${matches.length} found`}
        onTable={() => setAsTable((is) => !is)}
      />
      {asTable ? (
        <StretchTable nodes={nodes} sided={sided} nodeHref={nodeHref} />
      ) : (
        <>
          {sided ? <SidesLine nodes={nodes} gap={gap.text} grave={gap.grave} /> : null}
          <div ref={frame} className="relative min-h-80">
            <div
              ref={drawing}
              role="application"
              // biome-ignore lint/a11y/noNoninteractiveTabindex: the drawing is walked by keyboard
              tabIndex={0}
              aria-label={`${stretchSentence(nodes, sided, gap, laneKey)} ${KEYS_HELP}`}
              onKeyDown={onKeyDown}
              onClick={() => (pointed !== null ? setChosen(pointed) : undefined)}
              className="overflow-x-auto overflow-y-hidden [&_svg]:max-w-none"
            >
              {layout ? (
                <Drawing
                  layout={layout}
                  sentence={stretchSentence(nodes, sided, gap, laneKey)}
                  chosen={pointed ?? chosen}
                  onChoose={setPointed}
                />
              ) : null}
            </div>
            {layout && zoom.zoom > 1 ? <LaneNames layout={layout} /> : null}
          </div>
          <Walk nodes={walked} sided={sided} chosen={pointed ?? chosen} onChoose={setChosen} />
          <p aria-live="polite" className={cx('mt-1 min-h-7 text-sm', chosen === null && 'text-soft')}>
            {chosen === null ? (
              <span className="max-sm:hidden">
                In the drawing: arrow keys walk, Enter opens, + and − zoom; so does the wheel with Ctrl held.
              </span>
            ) : (
              <Link href={nodeHref(chosen)} className="rule-link inline-flex min-h-7 items-center">
                Open {chosen}: history, neighbours, incidents
              </Link>
            )}
          </p>
        </>
      )}
    </div>
  )
}

/** What lanes are, where their own names have scrolled away. */
function LaneNames({ layout }: { layout: StretchLayout }) {
  const longest = Math.max(0, ...layout.lanes.map(({ label }) => label.length))
  const width = Math.min(180, 12 + longest * 8)
  return (
    <svg
      width={width}
      height={layout.height}
      viewBox={`0 0 ${width} ${layout.height}`}
      aria-hidden="true"
      className="pointer-events-none absolute top-0 left-0"
    >
      {layout.lanes.map((lane) => (
        <g key={lane.label}>
          <rect
            x={0}
            y={lane.top + 2}
            width={8 + lane.label.length * 8}
            height={20}
            className="fill-sheet"
            opacity={0.9}
          />
          <text x={0} y={lane.top + 17} className="fill-soft font-text text-sm">
            {lane.label}
          </text>
        </g>
      ))}
    </svg>
  )
}
