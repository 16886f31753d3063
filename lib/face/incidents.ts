import type { Incident } from '@/lib/data/warn-dto'
import { formatCount } from './format'
import { formatDuration } from './time'

export const INCIDENT_STATE_WORDS: Record<Incident['state'], string> = {
  open: 'nobody has it',
  held: 'somebody has it',
  cleared: 'cleared',
  resolved: 'resolved',
}

/** "2 incidents are open; nobody has 1 of them." What has cleared waits for a word, not for somebody. */
export function incidentsSentence(unresolved: readonly Incident[]): string {
  const raised = unresolved.filter(({ state }) => state === 'open' || state === 'held')
  const free = raised.filter(({ state }) => state === 'open').length
  const cleared = unresolved.length - raised.length
  const rest =
    cleared === 0
      ? ''
      : ` ${formatCount(cleared, 'incident has', 'incidents have')} cleared and ${cleared === 1 ? 'waits' : 'wait'} to be resolved.`
  if (raised.length === 0) return cleared > 0 ? `No incident is open.${rest}` : 'No incident is open.'
  const open = formatCount(raised.length, 'incident is open', 'incidents are open')
  return `${open}; ${whoHas(free, raised.length)}.${rest}`
}

function whoHas(free: number, all: number): string {
  if (free === 0) return all === 1 ? 'somebody has it' : 'somebody has each of them'
  if (free < all) return `nobody has ${free} of them`
  return all === 1 ? 'nobody has it' : 'nobody has any of them'
}

/** Who has it, as the end of a sentence. */
export function holderWords({ state, holder }: Pick<Incident, 'state' | 'holder'>): string {
  if (state === 'resolved') return 'It is resolved.'
  if (state === 'cleared')
    return holder ? `It has cleared; ${holder.name} has it.` : 'It has cleared; nobody has it.'
  return holder ? `${holder.name} has it.` : 'Nobody has it yet.'
}

/** For the first page of an overlay: "Incident 12, raised 14 min ago: few links left. S. Ferrier has it." */
export function incidentLine(
  incident: Pick<Incident, 'number' | 'raisedAt' | 'sentence' | 'state' | 'holder'>,
  nowMs: number,
): string {
  const age = formatDuration(Math.max(0, (nowMs - Date.parse(incident.raisedAt)) / 1000))
  const sentence = incident.sentence.replace(/[.\s]+$/, '')
  return `Incident ${incident.number}, raised ${age} ago: ${sentence}. ${holderWords(incident)}`
}

export function isMuted({ mutedUntil }: Pick<Incident, 'mutedUntil'>, nowMs: number): boolean {
  return mutedUntil !== null && Date.parse(mutedUntil) > nowMs
}

export function formatBytes(bytes: number): string {
  if (bytes < 1_000) return `${bytes} B`
  return bytes < 1_000_000 ? `${Math.ceil(bytes / 1_000)} kB` : `${(bytes / 1_000_000).toFixed(1)} MB`
}
