'use client'

import { type RefObject, useState } from 'react'
import { Button } from '@/components/ui'
import { saveBlob } from '@/components/ui/save-text'
import { overlayUrls } from '@/lib/face/urls'
import { DRAWN, drawOut, toPng } from './draw-out'

export interface TakeAlongProps {
  slug: string
  /** What is drawn: all svg elements below it, one over the other. */
  drawing: RefObject<HTMLElement | null>
  /** What the drawing shows, for its file's name and title. */
  of: string
  /** The past moment that is drawn; null or absent for now, of which alone there are files. */
  at?: string | null
}

const FILES = [
  { file: 'nodes.csv', name: 'nodes (CSV)' },
  { file: 'links.csv', name: 'links (CSV)' },
  { file: 'overlay.graphml', name: 'GraphML' },
] as const

const linkClass = 'rule-link inline-flex min-h-9 items-center px-2'

/** The drawing as a picture, and what it is made from as files. */
export function TakeAlong({ slug, drawing, of, at = null }: TakeAlongProps) {
  const [problem, setProblem] = useState('')
  async function save(kind: 'svg' | 'png') {
    const frame = drawing.current
    if (!frame?.querySelector(DRAWN))
      return setProblem('There is no drawing at present. Show it, and try again.')
    try {
      const drawnAt = at ?? new Date().toISOString()
      const caption = `${slug}: ${of}, ${drawnAt.slice(0, 16).replace('T', ' ')} UTC`
      const file = await drawOut(frame, { title: caption, caption })
      const blob = kind === 'png' ? await toPng(file) : new Blob([file.svg], { type: 'image/svg+xml' })
      saveBlob(`${slug}-${of.replace(/[^a-z0-9]+/gi, '-')}.${kind}`, blob)
      setProblem('')
    } catch (error) {
      setProblem(`The drawing could not be saved. ${error instanceof Error ? error.message : ''}`)
    }
  }
  const { exported } = overlayUrls(slug)
  return (
    <div className="mt-4 flex flex-wrap items-center gap-x-1 gap-y-1 border-t border-hairline pt-3 text-sm">
      <span className="mr-2 text-soft">take it along:</span>
      <Button kind="quiet" className="text-sm" onClick={() => save('svg')}>
        drawing (SVG)
      </Button>
      <Button kind="quiet" className="text-sm" onClick={() => save('png')}>
        drawing (PNG)
      </Button>
      {at === null
        ? FILES.map(({ file, name }) => (
            <a key={file} className={linkClass} href={exported(file)} download>
              {name}
            </a>
          ))
        : null}
      <span role="status" className="font-semibold">
        {problem}
      </span>
    </div>
  )
}
