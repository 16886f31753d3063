import { type CurvePoint, curvePath, withBreaks, xOf, yOf } from '@/lib/face/curve'

const WIDTH = 96
const HEIGHT = 26

/** The course of one figure in a table's cell; the scale is that of the whole column. */
export function Spark(props: {
  points: readonly CurvePoint[]
  fromMs: number
  toMs: number
  most: number
  stepMs: number
  label: string
}) {
  const { points, fromMs, toMs, most, stepMs, label } = props
  const box = { width: WIDTH, height: HEIGHT, pad: 3, fromMs, toMs, least: 0, most }
  const last = points.at(-1)
  return (
    <svg viewBox={`0 0 ${WIDTH} ${HEIGHT}`} width={WIDTH} height={HEIGHT} role="img" aria-label={label}>
      <path d={`M0 ${HEIGHT - 2.5}H${WIDTH}`} className="stroke-hairline" />
      <path
        d={curvePath(withBreaks(points, 3.5 * stepMs), box)}
        fill="none"
        className="stroke-ink"
        strokeWidth={1.5}
      />
      {last && last[1] !== null ? (
        <circle cx={xOf(last[0], box)} cy={yOf(last[1], box)} r={2.25} className="fill-ink" />
      ) : null}
    </svg>
  )
}
