import type { EntityManager } from '@/lib/db'
import type { HeldVector, JoinedAgent, Snapshot } from '@/lib/method/control'
import type { Disclosure, Orders, WeightMode } from '@/lib/method/orders'
import type { PaceName } from '@/lib/method/pace'
import type { Complaint, NodeFacts, Sums } from '@/lib/method/report'
import { MAX_SHUT } from '@/lib/protocol'
import { PASS_TAIL_MS } from './passes'
import { epochMs, query } from './query'
import type { OpenRehearsal, TeamFloor } from './rehearsal/open'
import { loadFloors } from './rehearsal/store'
import type { KeyText } from './signer'
import { loadVectors } from './vectors'

export interface LoadedAgent extends JoinedAgent {
  name: string
  labels: Record<string, string>
  /** Whose it is. */
  teamId: string
}

/** A rotation of the overlay's signing key that is not over. */
export interface KeyInTurn {
  publicKey: string
  state: 'next' | 'previous'
  untilMs: number
  ringVersion: number
}

export interface Loaded {
  pace: PaceName
  disclosure: Disclosure
  weights: WeightMode
  retireAfterHours: number | null
  /** Agents of more than the owning team are or were of it. */
  isShared?: boolean
  /** Whom nobody keeps a link to. */
  shut: NonNullable<Orders['shut']>
  /** Agents whose figures did not hold, the latest first, with why. */
  leftOutNames: readonly { name: string; because: string }[]
  key: KeyText
  keysInTurn: readonly KeyInTurn[]
  /** Rehearsals that wait or run, in the order they were asked for, and the floors they are held against. */
  rehearsals: readonly OpenRehearsal[]
  floors: readonly TeamFloor[]
  /** Masked sums of the rounds asked for, as far as they have come. */
  vectors?: readonly HeldVector[]
  snapshot: Omit<Snapshot, 'agents'> & { agents: readonly LoadedAgent[] }
}

/** Null where the overlay is gone. */
export async function loadOverlay(
  em: EntityManager,
  overlayId: string,
  rounds: readonly number[] = [],
): Promise<Loaded | null> {
  const agents = await query<AgentRow>(
    em,
    `select a.id as "agentId", a.name, a.labels, coalesce(a.team_id, o.team_id) as "teamId", ${epochMs('a.joined_at')} as "joinedAtMs",
       s.incarnation, s.report_number as number, s.orders_sequence as "ordersSequence", s.sums, s.node,
       s.complaints, ${epochMs('s.received_at')} as "receivedAtMs"
     from agents a join overlays o on o.id = a.overlay_id left join agent_states s on s.agent_id = a.id
     where a.overlay_id = ? and a.state = 'joined' order by a.joined_at, a.id`,
    [overlayId],
  )
  // After the reports, so that none is from the future.
  const [overlay] = await query<OverlayRow>(
    em,
    `select o.pace, o.disclosure, o.weights, o.retire_after_hours as "retireAfterHours",
       o.public_key as "publicKey", o.private_key as "privateKey", ${epochMs('clock_timestamp()')} as "nowMs",
       exists (select from agent_faces f where f.overlay_id = o.id and f.team_id <> o.team_id) as "isShared",
       (select coalesce(jsonb_agg(jsonb_build_object('name', a.name, 'because', coalesce(a.left_out_because, ''))
          order by a.ended_at desc), '[]')
        from agents a where a.overlay_id = o.id and a.state = 'left-out') as "leftOutNames",
       (select coalesce(jsonb_agg(jsonb_build_object('publicKey', k.public_key, 'state', k.state,
          'untilMs', ${epochMs('k.until')}, 'ringVersion', k.ring_version)), '[]')
        from overlay_keys k where k.overlay_id = o.id) as "keysInTurn",
       (select coalesce(jsonb_agg(jsonb_build_object('id', r.id, 'teamId', r.team_id, 'incidentId', r.incident_id,
          'state', r.state, 'startsAtMs', ${epochMs('r.starts_at')}, 'startedAtMs', ${epochMs('r.started_at')},
          'progress', r.progress, 'exclude', r.exclude, 'taken', r.taken, 'remain', r.remain, 'result', r.result,
          'verdict', r.verdict, 'plan', r.plan) order by coalesce(r.starts_at, r.asked_at), r.id), '[]')
        from rehearsals r where r.overlay_id = o.id and r.state in ('waiting', 'running')) as rehearsals
     from overlays o where o.id = ?`,
    [overlayId],
  )
  if (!overlay) return null
  const { nowMs, publicKey, privateKey, ...rest } = overlay
  return {
    ...rest,
    key: { publicKey, privateKey },
    shut: await loadShut(em, overlayId),
    floors: overlay.rehearsals.length > 0 ? await loadFloors(em, overlayId) : [],
    vectors: await loadVectors(em, overlayId, rounds),
    // Whole milliseconds, as rows keep them; upwards, so that no report is from the future.
    snapshot: { atMs: Math.ceil(nowMs), agents: agents.map(toAgent) },
  }
}

/** Those who are no longer of the overlay while a pass of theirs may be good, the newest first. */
async function loadShut(em: EntityManager, overlayId: string): Promise<Loaded['shut']> {
  return query<Loaded['shut'][number]>(
    em,
    `select "agentId", reason from (
       select id as "agentId", state as reason, pass_ends_at as until from agents
       where overlay_id = ? and state <> 'joined' and pass_ends_at is not null
       union all select agent_id, 'left', until from shut_agents where overlay_id = ?) ended
     where until > clock_timestamp() - ? * interval '1 millisecond' order by until desc limit ?`,
    [overlayId, overlayId, PASS_TAIL_MS, MAX_SHUT],
  )
}

type OverlayRow = Omit<Loaded, 'shut' | 'snapshot' | 'key' | 'floors'> & KeyText & { nowMs: number }

interface AgentRow {
  agentId: string
  name: string
  labels: Record<string, string>
  teamId: string
  joinedAtMs: number
  incarnation: string | null
  number: string | number
  ordersSequence: string | number
  sums: Sums
  node: NodeFacts
  complaints: Complaint[]
  receivedAtMs: number
}

function toAgent(row: AgentRow): LoadedAgent {
  const { agentId, name, labels, teamId, joinedAtMs, incarnation, sums, node, complaints, receivedAtMs } = row
  const report = incarnation !== null && {
    incarnation,
    number: Number(row.number),
    ordersSequence: Number(row.ordersSequence),
    sums,
    node,
    complaints,
  }
  return { agentId, name, labels, teamId, joinedAtMs, last: report ? { report, receivedAtMs } : null }
}
