'use client'

import { useEffect, useRef, useState } from 'react'
import uPlot from 'uplot'
import 'uplot/dist/uPlot.min.css'
import type { TrendColumns } from '@/lib/face/trend'
import { chartOptions, type Marks } from './chart-options'
import { readInk, useSheetName } from './colours'

const FONTS_PATIENCE_MS = 500

export interface ChartProps {
  width: number
  columns: TrendColumns
  marks: Marks
  summary: string
  onPoint: (index: number | null) => void
}

export function Chart({ width, columns, marks, summary, onPoint }: ChartProps) {
  const host = useRef<HTMLDivElement>(null)
  const chart = useRef<uPlot | null>(null)
  const latest = useRef({ marks, columns, onPoint })
  latest.current = { marks, columns, onPoint }
  const sheet = useSheetName()
  const [fontsReady, setFontsReady] = useState(false)

  useEffect(() => {
    let here = true
    // A canvas does not wait for fonts: it would draw the first figures in another family. Nor do we, for ever.
    const timer = setTimeout(() => setFontsReady(true), FONTS_PATIENCE_MS)
    void document.fonts.ready.then(() => {
      if (!here) return
      setFontsReady(true)
      chart.current?.redraw(false, true)
    })
    return () => {
      here = false
      clearTimeout(timer)
    }
  }, [])

  useEffect(() => {
    if (!host.current || !fontsReady || sheet === null) return
    const options = chartOptions(
      width,
      readInk(),
      () => latest.current.marks,
      (i) => latest.current.onPoint(i),
    )
    const made = new uPlot(options, aligned(latest.current.columns), host.current)
    chart.current = made
    return () => {
      chart.current = null
      made.destroy()
    }
  }, [width, sheet, fontsReady])

  useEffect(() => {
    chart.current?.setData(aligned(columns))
  }, [columns, marks])

  return <div ref={host} role="img" aria-label={summary} className="h-[210px]" />
}

function aligned(columns: TrendColumns): uPlot.AlignedData {
  return [columns.x, columns.reading, columns.low, columns.high]
}
