import type uPlot from 'uplot'
import { formatReading } from '@/lib/face/format'
import type { Span } from '@/lib/face/trend'
import type { Ink } from './colours'

export const AXIS_LEFT = 58
export const AXIS_RIGHT = 22
const HEIGHT = 210
const FONT_PX = 12

/** What is drawn besides the line: read anew at each draw. */
export interface Marks {
  fromSeconds: number
  toSeconds: number
  top: number
  withheld: readonly Span[]
  demo: readonly Span[]
  usual: number | null
  floor: number | null
}

export function chartOptions(
  width: number,
  ink: Ink,
  marks: () => Marks,
  onPoint: (index: number | null) => void,
): uPlot.Options {
  const font = `${FONT_PX}px ${ink.figures}`
  return {
    width,
    height: HEIGHT,
    padding: [14, AXIS_RIGHT, 0, 0],
    legend: { show: false },
    cursor: { y: false, drag: { x: false, y: false }, points: { show: false } },
    scales: {
      x: { time: true, range: () => [marks().fromSeconds, marks().toSeconds] },
      y: { range: () => [0, marks().top] },
    },
    axes: [
      {
        font,
        stroke: ink.soft,
        grid: { show: false },
        ticks: { stroke: ink.hairline, width: 1, size: 4 },
        size: 30,
        space: 70,
        values: (_u, splits, _axis, _space, incr) =>
          splits.map((s) => (nearNow(s, width, marks()) ? '' : clockLabel(s, incr))),
      },
      {
        font,
        stroke: ink.soft,
        grid: { stroke: ink.hairline, width: 1 },
        ticks: { show: false },
        size: AXIS_LEFT,
        gap: 8,
        space: 34,
        values: (_u, splits) => splits.map((s) => (s === 0 ? '0' : trimmed(s))),
      },
    ],
    series: [
      {},
      { stroke: ink.ink, width: 2, points: { show: false } },
      { stroke: 'transparent', width: 0, points: { show: false } },
      { stroke: 'transparent', width: 0, points: { show: false } },
    ],
    bands: [{ series: [3, 2], fill: `${ink.ink}2e` }],
    hooks: {
      drawClear: [(u) => shade(u, marks(), ink)],
      draw: [(u) => overlay(u, marks(), ink)],
      setCursor: [(u) => onPoint(u.cursor.idx ?? null)],
    },
  }
}

/** Keeps the label of "now" free. */
function nearNow(seconds: number, width: number, marks: Marks): boolean {
  const share = (marks.toSeconds - seconds) / (marks.toSeconds - marks.fromSeconds)
  return share * (width - AXIS_LEFT - AXIS_RIGHT) < 44
}

function clockLabel(seconds: number, incr: number): string {
  const date = new Date(seconds * 1000)
  const midnight = date.getHours() === 0 && date.getMinutes() === 0
  if (incr >= 86_400 || midnight) return date.toLocaleDateString('en-GB', { day: 'numeric', month: 'short' })
  return date.toLocaleTimeString('en-GB', { hour: '2-digit', minute: '2-digit' })
}

function trimmed(value: number): string {
  return value >= 0.1 ? String(Number(value.toFixed(3))) : formatReading(value)
}

function shade(u: uPlot, marks: Marks, ink: Ink): void {
  const { ctx, bbox } = u
  ctx.save()
  for (const span of marks.demo) {
    const { x, width } = across(u, span)
    hatch(ctx, { x, y: bbox.top, width, height: bbox.height }, ink.hairline)
  }
  ctx.fillStyle = ink.wash
  for (const span of marks.withheld) {
    const { x, width } = across(u, span)
    ctx.fillRect(x, bbox.top, Math.max(2, width), bbox.height)
  }
  if (marks.floor !== null && marks.floor > 0) {
    const y = u.valToPos(marks.floor, 'y', true)
    hatch(ctx, { x: bbox.left, y, width: bbox.width, height: bbox.top + bbox.height - y }, ink.soft)
  }
  ctx.restore()
}

function across(u: uPlot, span: Span): { x: number; width: number } {
  const { left, width } = u.bbox
  const clamp = (s: number) => Math.min(left + width, Math.max(left, u.valToPos(s, 'x', true)))
  const x = clamp(span.from)
  return { x, width: clamp(span.to) - x }
}

export function hatch(
  ctx: CanvasRenderingContext2D,
  box: { x: number; y: number; width: number; height: number },
  stroke: string,
): void {
  const gap = 9 * devicePixelRatio
  ctx.save()
  ctx.beginPath()
  ctx.rect(box.x, box.y, box.width, box.height)
  ctx.clip()
  ctx.strokeStyle = stroke
  ctx.lineWidth = devicePixelRatio
  ctx.beginPath()
  for (let x = box.x - box.height; x < box.x + box.width; x += gap) {
    ctx.moveTo(x, box.y + box.height)
    ctx.lineTo(x + box.height, box.y)
  }
  ctx.stroke()
  ctx.restore()
}

function overlay(u: uPlot, marks: Marks, ink: Ink): void {
  const { ctx, bbox } = u
  const px = devicePixelRatio
  const right = bbox.left + bbox.width
  ctx.save()
  ctx.font = `${FONT_PX * px}px ${ink.text}`
  ctx.textBaseline = 'alphabetic'
  ctx.textAlign = 'left'
  const taken: number[] = []
  for (const line of [
    { value: marks.usual, name: 'usual', dash: [6, 4] },
    { value: marks.floor, name: 'floor', dash: [] },
  ]) {
    if (line.value === null || line.value > marks.top) continue
    const y = u.valToPos(line.value, 'y', true)
    ctx.strokeStyle = ink.soft
    ctx.lineWidth = px
    ctx.setLineDash(line.dash.map((d) => d * px))
    ctx.beginPath()
    ctx.moveTo(bbox.left, y)
    ctx.lineTo(right, y)
    ctx.stroke()
    // Two lines close together: the second name goes below its line.
    const above = !taken.some((t) => Math.abs(t - y) < 16 * px)
    taken.push(y)
    words(
      ctx,
      `${line.name} ${formatReading(line.value)}`,
      bbox.left + 6 * px,
      above ? y - 5 * px : y + 14 * px,
      ink,
    )
  }
  ctx.setLineDash([])
  const lastDemo = marks.demo.at(-1)
  if (lastDemo) {
    const { x, width } = across(u, lastDemo)
    if (width > 110 * px) {
      ctx.textAlign = 'right'
      words(ctx, 'demo history', x + width - 6 * px, bbox.top + bbox.height - 7 * px, ink)
    }
  }
  ctx.textAlign = 'center'
  ctx.fillStyle = ink.soft
  ctx.font = `${FONT_PX * px}px ${ink.figures}`
  ctx.fillText('now', right, bbox.top + bbox.height + 18.5 * px)
  ctx.restore()
}

/** Text with the sheet showing round it, so that lines and hatching do not run through the letters. */
function words(ctx: CanvasRenderingContext2D, text: string, x: number, y: number, ink: Ink): void {
  ctx.lineJoin = 'round'
  ctx.strokeStyle = ink.sheet
  ctx.lineWidth = 5 * devicePixelRatio
  ctx.strokeText(text, x, y)
  ctx.fillStyle = ink.soft
  ctx.fillText(text, x, y)
}
