import { Mark, type MarkShape } from '@/components/ui'
import type { OverlayEvent } from '@/lib/data/dto'

interface EventWords {
  /** What sort of event it is, before its sentence. */
  word: string
  shape: MarkShape
  /** Split and unheard only. */
  grave?: boolean
}

/** Full: more than before. Short: less, on purpose. Dashed: not heard. Crossed: refused. Hollow: a change of another sort. */
const EVENTS: Record<OverlayEvent['kind'], EventWords> = {
  'agent-joined': { word: 'joined', shape: 'full' },
  'agent-left': { word: 'left', shape: 'short' },
  'agent-revoked': { word: 'revoked', shape: 'crossed' },
  'agent-unheard': { word: 'unheard', shape: 'dashed', grave: true },
  'agent-heard': { word: 'heard', shape: 'full' },
  'agent-left-out': { word: 'left out', shape: 'crossed' },
  'agent-readmitted': { word: 'readmitted', shape: 'full' },
  'agent-cloned': { word: 'cloned', shape: 'crossed' },
  'level-changed': { word: 'level', shape: 'hollow' },
  'link-lost': { word: 'link', shape: 'short' },
  'link-found': { word: 'link', shape: 'full' },
  'link-weakened': { word: 'link', shape: 'short' },
  'link-recovered': { word: 'link', shape: 'full' },
  withheld: { word: 'withheld', shape: 'dashed' },
  resumed: { word: 'resumed', shape: 'full' },
  'key-rotated': { word: 'key', shape: 'hollow' },
  'upgrade-offered': { word: 'upgrade', shape: 'hollow' },
  'upgrade-halted': { word: 'upgrade', shape: 'short' },
  'collector-away': { word: 'collector', shape: 'dashed' },
  'incident-raised': { word: 'incident', shape: 'hollow' },
  'incident-cleared': { word: 'incident', shape: 'full' },
  'warnings-away': { word: 'warnings', shape: 'dashed' },
  'rehearsal-planned': { word: 'rehearsal', shape: 'hollow' },
  'rehearsal-started': { word: 'rehearsal', shape: 'hollow' },
  'rehearsal-ended': { word: 'rehearsal', shape: 'hollow' },
  'partner-joined': { word: 'partner', shape: 'full' },
  'partner-ended': { word: 'partner', shape: 'short' },
}

/** Stands before the event's sentence, which says the same to those who see no shapes. */
export function EventMark({ kind }: { kind: OverlayEvent['kind'] }) {
  const { word, shape, grave } = EVENTS[kind]
  return (
    <Mark shape={shape} grave={grave}>
      <span className="sr-only">{word}: </span>
    </Mark>
  )
}
