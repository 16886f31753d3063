import type { EventMark } from '@/lib/face/trend'

const ROW_PX = 20

/** What happened, below the time axis. The list of the last hour says the same in text. */
export function EventStrip({ marks, width }: { marks: readonly EventMark[]; width: number }) {
  const rows = Math.max(1, ...marks.map((m) => m.row + 1))
  return (
    <svg width={width} height={rows * ROW_PX} viewBox={`0 0 ${width} ${rows * ROW_PX}`} aria-hidden="true">
      {marks.map((m) => {
        const y = m.row * ROW_PX
        return (
          <g key={m.id}>
            <path d={`M${m.x} ${y + 4}l4.5 8h-9z`} className="fill-ink" />
            <text
              x={m.x + (m.anchor === 'start' ? 8 : -8)}
              y={y + 13}
              textAnchor={m.anchor}
              className="fill-ink font-text text-[13px]"
            >
              {m.text}
            </text>
          </g>
        )
      })}
    </svg>
  )
}
