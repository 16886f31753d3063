import { z } from 'zod'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { asAppError, invalidInput } from '@/lib/http/problem'
import { assertStorable } from '@/lib/http/storable'
import type { Report } from '@/lib/method/report'
import {
  type KeyRing,
  type PassGrant,
  RELAYED_MOST_SECONDS,
  type RelayedReply,
  reportSchema,
  type SignedReport,
  verifyReport,
} from '@/lib/protocol'
import { agentEnded } from './agent-proof'
import { type Admitted, type Arrival, mayReport } from './ingest-entry'
import { findAgents, type Sender } from './ingest-store'

/** A relayed report as it was found: an arrival, or why it is none. */
export interface Relayed {
  signed: SignedReport
  number: number | null
  found: Arrival | AppError
}

/** What each admitted agent delivers for others. Nothing that is wrong with one harms another, or the deliverer. */
export async function openRelayed(
  em: EntityManager,
  admitted: readonly Admitted[],
  nowMs: number,
): Promise<Map<Admitted, Relayed[]>> {
  const carrying = admitted.filter(({ entry }) => entry.request.relayed?.length)
  const ids = carrying.flatMap(({ entry }) => (entry.request.relayed ?? []).map(({ agentId }) => agentId))
  const agents = await findAgents(em, [...new Set(ids.filter((id) => z.uuid().safeParse(id).success))])
  return new Map(
    carrying.map((one) => [
      one,
      (one.entry.request.relayed ?? []).map((signed) =>
        open(signed, agents.get(signed.agentId), one.sender, nowMs),
      ),
    ]),
  )
}

function open(signed: SignedReport, sender: Sender | undefined, deliverer: Sender, nowMs: number): Relayed {
  let number: number | null = null
  try {
    // Of another overlay: as if it did not exist, which is all the deliverer may learn of it.
    if (!sender || sender.overlayId !== deliverer.overlayId)
      throw new AppError('unknown-agent', 'There is no agent with this id in the overlay.')
    if (!verifyReport(signed, sender.publicKey))
      throw new AppError('bad-signature', 'The report is not signed with the key of its agent.')
    if (!mayReport(sender)) throw agentEnded()
    const ageMs = Math.abs(nowMs - Date.parse(signed.at))
    if (ageMs > RELAYED_MOST_SECONDS * 1000)
      throw new AppError(
        'too-old',
        `The report is ${Math.round(ageMs / 1000)} s old; relayed ones count for ${RELAYED_MOST_SECONDS} s.`,
      )
    const report = read(signed.body)
    number = report.number
    return { signed, number, found: { sender, report, relayed: true, outcome: null } }
  } catch (error) {
    return { signed, number, found: asAppError(error) }
  }
}

function read(body: string): Report {
  let json: unknown
  try {
    json = JSON.parse(body)
  } catch {
    throw new AppError('malformed-json', 'The report is not JSON.')
  }
  assertStorable(json)
  const parsed = reportSchema.safeParse(json)
  if (!parsed.success) throw invalidInput(parsed.error)
  return parsed.data
}

/** What goes back the way the report came. */
export function relayedReply(
  { signed, number, found }: Relayed,
  pass: PassGrant | null,
  keyRings?: KeyRing[],
): RelayedReply {
  const { agentId } = signed
  if (found instanceof AppError) return { agentId, number, stored: false, problem: found.code, pass: null }
  const { outcome } = found
  if (outcome?.kind === 'refused')
    return { agentId, number, stored: false, problem: asAppError(outcome.error).code, pass: null }
  const stored = outcome?.kind === 'stored'
  return { agentId, number, stored, problem: null, pass, ...(keyRings ? { keyRings } : {}) }
}
