'use client'

import { type RefObject, useEffect, useLayoutEffect, useRef, useState } from 'react'
import { zoomBy } from '@/lib/face/stretch'

export interface Zoom {
  zoom: number
  by: (steps: number) => void
  whole: () => void
}

/** How wide the drawing is, against its frame; what is in the middle, or under the pointer, stays where it is. */
export function useZoom(frame: RefObject<HTMLElement | null>): Zoom {
  const [zoom, setZoom] = useState(1)
  const before = useRef({ zoom: 1, at: null as number | null })

  useEffect(() => {
    const element = frame.current
    if (!element) return
    // React's own wheel events cannot keep the page from zooming.
    const onWheel = (event: WheelEvent) => {
      if (!event.ctrlKey && !event.metaKey) return
      event.preventDefault()
      before.current.at = event.clientX - element.getBoundingClientRect().left
      setZoom((now) => zoomBy(now, event.deltaY < 0 ? 1 : -1))
    }
    element.addEventListener('wheel', onWheel, { passive: false })
    return () => element.removeEventListener('wheel', onWheel)
  }, [frame])

  useLayoutEffect(() => {
    const element = frame.current
    const { zoom: was, at } = before.current
    if (!element || was === zoom) return
    const fixed = at ?? element.clientWidth / 2
    element.scrollLeft = ((element.scrollLeft + fixed) * zoom) / was - fixed
    before.current = { zoom, at: null }
  }, [frame, zoom])

  return {
    zoom,
    by: (steps) => setZoom((now) => zoomBy(now, steps)),
    whole: () => setZoom(1),
  }
}
