'use client'

import { memo, type PointerEvent, useMemo } from 'react'
import { cx } from '@/lib/face/cx'
import {
  type Bundle,
  type Dot,
  dotFinder,
  type StretchLayout,
  type Taut,
  type Text,
} from '@/lib/face/stretch'
import { DOTS_MOST, ManyDots } from './many-dots'

export interface DrawingProps {
  layout: StretchLayout
  sentence: string
  /** The node pointed at or walked to. */
  chosen: string | null
  onChoose: (name: string | null) => void
  /** Left out: paths for many, elements for few. */
  marks?: 'elements' | 'paths'
}

export function Drawing({ layout, sentence, chosen, onChoose, marks }: DrawingProps) {
  const { width, height, dots } = layout
  const dot = dots.find((d) => d.node.name === chosen)
  const many = marks === undefined ? dots.length > DOTS_MOST : marks === 'paths'
  const find = useMemo(() => (many ? dotFinder(dots) : null), [many, dots])
  function point(event: PointerEvent<SVGSVGElement>) {
    const box = event.currentTarget.getBoundingClientRect()
    const across = ((event.clientX - box.left) * width) / box.width
    const down = ((event.clientY - box.top) * height) / box.height
    const name = find?.(across, down)?.node.name ?? null
    if (name !== chosen && (name !== null || dot !== undefined)) onChoose(name)
  }
  return (
    <svg
      viewBox={`0 0 ${width} ${height}`}
      width={width}
      height={height}
      role="img"
      data-drawn
      aria-label={sentence}
      className="block max-w-full select-none"
      onPointerMove={many ? point : undefined}
      onPointerLeave={() => onChoose(null)}
    >
      <Ground layout={layout} />
      {many ? <ManyDots dots={dots} /> : <Dots dots={dots} onChoose={onChoose} />}
      <Labels taut={layout.taut} bundle={layout.bundle} names={layout.names} />
      {dot ? <Pointed dot={dot} width={width} named={layout.names.some((n) => n.text === chosen)} /> : null}
    </svg>
  )
}

const Ground = memo(function Ground({ layout }: { layout: StretchLayout }) {
  const { lanes, parking, faint, taut, bundle, width, height } = layout
  const above = width < 640
  return (
    <g>
      {lanes.map((lane, i) => (
        <g key={lane.label}>
          {i > 0 ? (
            <path
              d={`M0 ${lane.top}H${width}`}
              className="stroke-hairline"
              strokeDasharray="1 5"
              fill="none"
            />
          ) : null}
        </g>
      ))}
      {parking ? (
        <g>
          <path d={`M${parking.left} 0V${height}`} className="stroke-hairline" fill="none" />
          <LabelText text={parking.label} className="fill-soft font-text text-xs" />
        </g>
      ) : null}
      <path d={faint} className="stroke-(--faint)" fill="none" />
      {taut.map((t) => (
        <path
          key={`${t.link.a}\n${t.link.b}`}
          d={t.path}
          fill="none"
          className={t.lost ? 'stroke-vermilion' : 'stroke-ink'}
          strokeWidth={t.lost ? 1.75 : t.thickness}
          strokeDasharray={t.lost ? '0.1 6' : undefined}
          strokeLinecap={t.lost ? 'round' : 'butt'}
        />
      ))}
      {bundle ? <BundleLines bundle={bundle} /> : null}
      {lanes.map((lane) => (
        <text
          key={lane.label}
          x={0}
          y={above ? lane.top + 15 : lane.top + lane.height / 2 + 5}
          className="fill-soft stroke-sheet font-text text-sm [paint-order:stroke]"
          strokeWidth={above ? 5 : 0}
        >
          {shorten(lane.label, above ? 40 : 19)}
        </text>
      ))}
    </g>
  )
})

function BundleLines({ bundle }: { bundle: Bundle }) {
  return (
    <g className={bundle.lost ? 'stroke-vermilion' : 'stroke-ink'} fill="none" strokeWidth={1.5}>
      {bundle.brackets.map((d) => (
        <path key={d} d={d} />
      ))}
      {bundle.strands.map((d) => (
        <path key={d} d={d} strokeDasharray={bundle.lost ? '0.1 6' : undefined} strokeLinecap="round" />
      ))}
    </g>
  )
}

const Dots = memo(function Dots({ dots, onChoose }: { dots: Dot[]; onChoose: (name: string) => void }) {
  return (
    <g>
      {dots.map((d) => (
        <g key={d.node.name} onPointerEnter={() => onChoose(d.node.name)}>
          <circle cx={d.x} cy={d.y} r={d.radius + 3} fill="transparent" />
          <DotShape dot={d} />
        </g>
      ))}
    </g>
  )
})

function DotShape({ dot }: { dot: Dot }) {
  const { x, y, radius: r, unheard } = dot
  const tone = dot.side === 'a' ? 'text-side-a' : dot.side === 'b' ? 'text-side-b' : 'text-ink'
  const away = dot.node.state === 'left' || dot.node.state === 'revoked'
  const paint = {
    className: cx(tone, away && 'opacity-40'),
    fill: unheard ? 'var(--sheet)' : 'currentColor',
    stroke: unheard ? 'currentColor' : 'none',
    strokeWidth: unheard ? 1.75 : 0,
    strokeDasharray: unheard ? '2.5 1.75' : undefined,
  }
  const inner = unheard ? r - 0.9 : r
  if (dot.shape === 'round') return <circle cx={x} cy={y} r={inner} {...paint} />
  return <rect x={x - inner} y={y - inner} width={2 * inner} height={2 * inner} {...paint} />
}

const Labels = memo(function Labels(props: { taut: Taut[]; bundle: Bundle | null; names: Text[] }) {
  return (
    <g pointerEvents="none">
      {props.taut.map((t) =>
        t.tag ? <Tag key={`${t.link.a}\n${t.link.b}`} text={t.tag} className="fill-ink" /> : null,
      )}
      {props.bundle ? (
        <Tag text={props.bundle.tag} className={props.bundle.lost ? 'fill-vermilion' : 'fill-ink'} />
      ) : null}
      {props.names.map((n) => (
        <LabelText key={n.text} text={n} className="fill-soft font-text text-xs" />
      ))}
    </g>
  )
})

function Tag({ text, className }: { text: Text; className: string }) {
  const { box } = text
  return (
    <g>
      <rect
        x={box.left}
        y={box.top}
        width={box.right - box.left}
        height={box.bottom - box.top}
        className="fill-sheet"
      />
      <LabelText text={text} className={cx('font-figures text-[13px]', className)} />
    </g>
  )
}

function LabelText({ text, className }: { text: Text; className: string }) {
  return (
    <text x={text.x} y={text.y + 4.5} textAnchor={text.anchor} className={className}>
      {text.text}
    </text>
  )
}

function Pointed({ dot, width, named }: { dot: Dot; width: number; named: boolean }) {
  const toRight = dot.x < width / 2
  return (
    <g pointerEvents="none">
      <circle cx={dot.x} cy={dot.y} r={dot.radius + 4} fill="none" className="stroke-ink" strokeWidth={1.5} />
      {named ? null : (
        <text
          x={dot.x + (toRight ? 1 : -1) * (dot.radius + 9)}
          y={dot.y + 4.5}
          textAnchor={toRight ? 'start' : 'end'}
          className="fill-ink stroke-sheet font-text text-sm font-semibold [paint-order:stroke]"
          strokeWidth={5}
          strokeLinejoin="round"
        >
          {dot.node.name}
        </text>
      )}
    </g>
  )
}

function shorten(text: string, length: number): string {
  return text.length > length ? `${text.slice(0, length - 1)}…` : text
}
