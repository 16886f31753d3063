'use client'

import { useEffect, useRef } from 'react'
import uPlot from 'uplot'
import 'uplot/dist/uPlot.min.css'
import { AXIS_LEFT, AXIS_RIGHT, hatch } from '@/components/trend/chart-options'
import { type Ink, readInk, useSheetName } from '@/components/trend/colours'
import type { RulePreview } from '@/lib/data/rules-dto'

const HEIGHT = 210

/** The reading with a rule's floor, and where it would have been raised; the table beside it says the same. */
export function PreviewChart({ width, preview }: { width: number; preview: RulePreview }) {
  const host = useRef<HTMLDivElement>(null)
  const sheet = useSheetName()
  useEffect(() => {
    if (!host.current || sheet === null) return
    const chart = new uPlot(optionsOf(width, preview, readInk()), columnsOf(preview), host.current)
    return () => chart.destroy()
  }, [width, preview, sheet])
  return <div ref={host} role="img" aria-label={preview.sentence} className="h-[210px]" />
}

function columnsOf({ points, pointSeconds }: RulePreview): uPlot.AlignedData {
  const x: number[] = []
  const columns: (number | null)[][] = [[], [], [], []]
  const push = (at: number, values: readonly (number | null)[]) => {
    x.push(at)
    for (const [index, column] of columns.entries()) column.push(values[index] ?? null)
  }
  for (const { at, lambda2, least, most, floor } of points) {
    const seconds = Date.parse(at) / 1000
    const before = x.at(-1)
    if (before !== undefined && seconds - before > 2 * pointSeconds)
      push(before + pointSeconds, [null, null, null, null])
    push(seconds, [lambda2, least, most, floor])
  }
  return [x, ...columns]
}

function optionsOf(width: number, preview: RulePreview, ink: Ink): uPlot.Options {
  const font = `12px ${ink.figures}`
  const seen = preview.points.flatMap(({ most, floor }) => [most ?? 0, floor ?? 0])
  const top = Math.max(0, ...seen) * 1.12 || 1
  const hidden = { stroke: 'transparent', width: 0, points: { show: false } }
  return {
    width,
    height: HEIGHT,
    padding: [14, AXIS_RIGHT, 0, 0],
    legend: { show: false },
    cursor: { show: false },
    scales: {
      x: { time: true, range: () => [Date.parse(preview.from) / 1000, Date.parse(preview.to) / 1000] },
      y: { range: () => [0, top] },
    },
    axes: [
      { font, stroke: ink.soft, grid: { show: false }, size: 30, space: 70, values: dayLabels },
      {
        font,
        stroke: ink.soft,
        grid: { stroke: ink.hairline, width: 1 },
        size: AXIS_LEFT,
        gap: 8,
        space: 34,
      },
    ],
    series: [
      {},
      { stroke: ink.ink, width: 2, points: { show: false } },
      hidden,
      hidden,
      { stroke: ink.soft, width: 1, points: { show: false } },
    ],
    bands: [{ series: [3, 2], fill: `${ink.ink}2e` }],
    hooks: { drawClear: [(u) => shade(u, preview, ink)] },
  }
}

function dayLabels(_u: uPlot, splits: number[], _axis: number, _space: number, incr: number): string[] {
  return splits.map((seconds) => {
    const date = new Date(seconds * 1000)
    const midnight = date.getHours() === 0 && date.getMinutes() === 0
    return incr >= 86_400 || midnight
      ? date.toLocaleDateString('en-GB', { day: 'numeric', month: 'short' })
      : date.toLocaleTimeString('en-GB', { hour: '2-digit', minute: '2-digit' })
  })
}

function shade(u: uPlot, { points, spans, to }: RulePreview, ink: Ink): void {
  const { ctx, bbox } = u
  ctx.save()
  ctx.beginPath()
  ctx.rect(bbox.left, bbox.top, bbox.width, bbox.height)
  ctx.clip()
  const across = (at: string) => u.valToPos(Date.parse(at) / 1000, 'x', true)
  ctx.fillStyle = `${ink.ink}24`
  for (const { raisedAt, clearedAt } of spans) {
    const from = across(raisedAt)
    ctx.fillRect(from, bbox.top, Math.max(2 * devicePixelRatio, across(clearedAt ?? to) - from), bbox.height)
  }
  const bottom = bbox.top + bbox.height
  const floors = points.filter(({ floor }) => floor !== null)
  const [first, last] = [floors[0], floors.at(-1)]
  if (first && last) {
    ctx.beginPath()
    ctx.moveTo(across(first.at), bottom)
    for (const { at, floor } of floors) ctx.lineTo(across(at), u.valToPos(floor ?? 0, 'y', true))
    ctx.lineTo(across(last.at), bottom)
    ctx.clip()
    hatch(ctx, { x: bbox.left, y: bbox.top, width: bbox.width, height: bbox.height }, ink.soft)
  }
  ctx.restore()
}
