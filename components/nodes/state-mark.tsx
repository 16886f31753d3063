import { Mark, type MarkShape } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'

const SHAPES: Record<OverlayNode['state'], MarkShape> = {
  heard: 'full',
  unheard: 'dashed',
  detached: 'hollow',
  left: 'short',
  revoked: 'crossed',
  'left-out': 'crossed',
}

export const STATE_WORDS: Record<OverlayNode['state'], string> = {
  heard: 'heard',
  unheard: 'unheard',
  detached: 'detached',
  left: 'left',
  revoked: 'revoked',
  'left-out': 'left out',
}

export function StateMark({ state }: { state: OverlayNode['state'] }) {
  return (
    <Mark shape={SHAPES[state]} grave={state === 'unheard'}>
      {STATE_WORDS[state]}
    </Mark>
  )
}
