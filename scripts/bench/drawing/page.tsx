/** What the bench looks at: the product's own drawing of an overlay made up by chance, panned, pointed at and zoomed. */
import { useState } from 'react'
import { flushSync } from 'react-dom'
import { createRoot } from 'react-dom/client'
import { Drawing } from '@/components/stretch/drawing'
import { layoutStretch, type StretchInput } from '@/lib/face/stretch'

export type Act = 'still' | 'pan' | 'point' | 'zoom'

export interface DrawingBench {
  draw(input: Omit<StretchInput, 'width'>, marks: 'elements' | 'paths'): void
  /** Times between frames, milliseconds. */
  run(act: Act, frames: number): Promise<number[]>
}

declare global {
  interface Window {
    drawingBench: DrawingBench
  }
}

const FRAME_PX = 1200
const ZOOM = 4

const nextFrame = () => new Promise<number>((resolve) => requestAnimationFrame(resolve))

const acts: Record<Act, (frame: number) => void> = {
  still: () => {},
  pan: () => {},
  point: () => {},
  zoom: () => {},
}

window.drawingBench = {
  draw(input, marks) {
    const host = document.createElement('div')
    document.body.append(host)
    function Page() {
      const [chosen, choose] = useState<string | null>(null)
      const [layout, setLayout] = useState(() => layoutStretch({ ...input, width: FRAME_PX * ZOOM }))
      const names = input.nodes.map(({ name }) => name)
      acts.point = (frame) => choose(names[(frame * 101) % names.length] ?? null)
      acts.zoom = (frame) => {
        const zoom = 1 + ((frame * 7) % 30) / 10
        setLayout(layoutStretch({ ...input, width: Math.round(FRAME_PX * zoom) }))
      }
      return (
        <div className="scroller">
          <Drawing layout={layout} sentence="" chosen={chosen} onChoose={choose} marks={marks} />
        </div>
      )
    }
    flushSync(() => createRoot(host).render(<Page />))
    acts.pan = (frame) => {
      const scroller = host.querySelector('.scroller')
      if (scroller) scroller.scrollLeft = (frame * 37) % (FRAME_PX * (ZOOM - 1))
    }
  },
  async run(act, frames) {
    const times: number[] = []
    let before = await nextFrame()
    for (let frame = 0; frame < frames; frame++) {
      flushSync(() => acts[act](frame))
      const now = await nextFrame()
      times.push(now - before)
      before = now
    }
    return times
  },
}
