import type { Overlay } from '@/entities'
import { seatOf } from '@/lib/auth/overlay-rights'
import { pseudonymOf } from '@/lib/collector/pseudonym'
import { query } from '@/lib/collector/query'
import type { Said } from '@/lib/collector/said'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { partiesOf } from './overlays'

export interface Face {
  agentId: string
  teamId: string
  number: number
  name: string
}

export type Labels = Readonly<Record<string, string>>

/**
 * What a team may see of the nodes of an overlay: its own as they are, those of other teams under names that only it
 * uses, with the labels that their team shares. Whatever names nodes or labels to people or programs goes through here.
 */
export interface Sight {
  /** No agent is another team's: there is nothing to hide. */
  isWhole: boolean
  /** It is that of the team that owns the overlay. */
  isOwners: boolean
  /** The teams as which the reader looks. */
  viewers: readonly string[]
  isOwn(agentId: string): boolean
  nameOf(agent: { agentId: string; name: string }): string
  labelsOf(agent: { agentId: string; labels: Labels }): Record<string, string>
  /** Whether every node's labels of this key are seen. */
  seesKey(key: string): boolean
  /** For a node that is known by name only: whoever had the name last. */
  named(name: string): string
  /** Whose node a seen name stands for. */
  agentNamed(seen: string): string | null
  /** The node's own name, to look up what is kept under it: never to be shown. Null where the reader sees no such name. */
  nameBehind(seen: string): string | null
  /** A text, for this reader. */
  say(said: Said): string
  /** Whether what is told to one team only, or to all, is for this reader. */
  isTold(teamId: string | null | undefined): boolean
}

export interface SightInit {
  secret: string
  ownerTeamId: string
  /** Teams as which the reader looks; the first one's names are used. */
  viewers: readonly string[]
  /** Of every agent that was ever of the overlay, or none where all are the reader's own. */
  faces: readonly Face[]
  /** Keys of labels that a team shows to the others. */
  sharedKeys: ReadonlyMap<string, readonly string[]>
}

/** A node of which nothing is known any more. */
const SOMEBODY = 'a node'

export function createSight({ secret, ownerTeamId, viewers, faces, sharedKeys }: SightInit): Sight {
  const own = new Set(viewers)
  const isWhole = faces.every(({ teamId }) => own.has(teamId))
  const byAgent = new Map(faces.map((face) => [face.agentId, face]))
  const byName = new Map<string, Face[]>()
  for (const face of [...faces].sort((a, b) => a.number - b.number))
    byName.set(face.name, [...(byName.get(face.name) ?? []), face])
  const isOwn = (face: Face | undefined): boolean => face !== undefined && own.has(face.teamId)
  const others = [...new Set(faces.filter((face) => !isOwn(face)).map(({ teamId }) => teamId))]
  const sharesOf = (teamId: string) => sharedKeys.get(teamId) ?? []
  const pseudonyms = new Map<number, string>()
  const hidden = ({ number }: Face): string => {
    const known = pseudonyms.get(number)
    if (known !== undefined) return known
    const made = pseudonymOf(secret, viewers[0] ?? '', number)
    pseudonyms.set(number, made)
    return made
  }
  const shown = (face: Face | undefined): string => {
    if (face === undefined) return SOMEBODY
    return isOwn(face) ? face.name : hidden(face)
  }
  const faceBehind = (seen: string): Face | undefined =>
    byName.get(seen)?.filter(isOwn).at(-1) ?? faces.find((face) => !isOwn(face) && hidden(face) === seen)
  const named = (name: string) => (isWhole ? name : shown(byName.get(name)?.at(-1)))
  return {
    isWhole,
    isOwners: own.has(ownerTeamId),
    viewers,
    isOwn: (agentId) => isWhole || isOwn(byAgent.get(agentId)),
    nameOf: ({ agentId, name }) => {
      const face = byAgent.get(agentId)
      return isWhole || isOwn(face) ? name : shown(face)
    },
    labelsOf: ({ agentId, labels }) => {
      const face = byAgent.get(agentId)
      if (isWhole || isOwn(face)) return { ...labels }
      const keys = face ? sharesOf(face.teamId) : []
      return Object.fromEntries(Object.entries(labels).filter(([key]) => keys.includes(key)))
    },
    seesKey: (key) => isWhole || others.every((teamId) => sharesOf(teamId).includes(key)),
    named,
    agentNamed: (seen) => faceBehind(seen)?.agentId ?? null,
    nameBehind: (seen) => (isWhole ? seen : (faceBehind(seen)?.name ?? null)),
    say: (said) =>
      said
        .map((piece) => {
          if (typeof piece === 'string') return piece
          if ('node' in piece) return named(piece.node)
          return isWhole || byName.get(piece.of)?.every(isOwn) ? piece.text : ''
        })
        .join(''),
    isTold: (teamId) => teamId == null || own.has(teamId),
  }
}

/** Of the caller, in an overlay that they may see. */
export async function sightOf(call: Call, overlay: Overlay): Promise<Sight> {
  const parties = await partiesOf(call.em, overlay)
  // Programs of the server itself see what the owning team sees.
  if (call.caller.kind === 'system') return sightAs(call.em, overlay.id, [parties.ownerTeamId])
  const seat = seatOf(call.caller, parties)
  return sightAs(call.em, overlay.id, seat ? [seat.teamId] : [])
}

interface Row {
  secret: string
  ownerTeamId: string
  sharedLabels: string[]
  partners: { teamId: string; sharedLabels: string[] }[]
  hasOthers: boolean
}

/** As these teams, for whoever has checked that the reader is of them. */
export async function sightAs(
  em: EntityManager,
  overlayId: string,
  viewers: readonly string[],
): Promise<Sight> {
  const own = `{${viewers.join(',')}}`
  const [row] = await query<Row>(
    em,
    `select o.sight_secret as secret, o.team_id as "ownerTeamId", o.shared_labels as "sharedLabels",
       (select coalesce(jsonb_agg(jsonb_build_object('teamId', p.team_id, 'sharedLabels', p.shared_labels)), '[]')
        from overlay_partners p where p.overlay_id = o.id and p.state = 'accepted') as partners,
       exists (select from agent_faces f where f.overlay_id = o.id and f.team_id <> all(?::uuid[])) as "hasOthers"
     from overlays o where o.id = ?`,
    [own, overlayId],
  )
  const { secret = '', ownerTeamId = '', sharedLabels = [], partners = [], hasOthers = false } = row ?? {}
  return createSight({
    secret,
    ownerTeamId,
    viewers,
    faces: hasOthers ? await loadFaces(em, overlayId) : [],
    sharedKeys: new Map([
      [ownerTeamId, sharedLabels],
      ...partners.map((one) => [one.teamId, one.sharedLabels] as const),
    ]),
  })
}

async function loadFaces(em: EntityManager, overlayId: string): Promise<Face[]> {
  return query<Face>(
    em,
    `select agent_id as "agentId", team_id as "teamId", number::int as number, name from agent_faces
     where overlay_id = ?`,
    [overlayId],
  )
}
