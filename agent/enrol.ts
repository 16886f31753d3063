import { type EnrolReply, enrolText, type KeyPair, signText } from '@/lib/protocol'
import type { CollectorClient, CollectorResult } from './collector/client'

export interface EnrolInit {
  code: string
  name: string
  labels: Record<string, string>
  /** Where neighbours may dial this agent; null if nowhere. */
  address: string | null
  version: string
  /** How the overlay knows the node, and a fingerprint of the machine. */
  node?: string | null
  host?: string
}

/** Joins an overlay with a joining code, under a key that stays here. */
export function enrol(
  { collector, keys }: { collector: CollectorClient; keys: KeyPair },
  init: EnrolInit,
  signal: AbortSignal,
): Promise<CollectorResult<EnrolReply>> {
  const { publicKey } = keys
  const signature = signText(keys.privateKey, enrolText({ code: init.code, name: init.name, publicKey }))
  return collector.enrol({ ...init, publicKey, signature }, signal)
}
