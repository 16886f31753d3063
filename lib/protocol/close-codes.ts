/**
 * Why a link was closed, as WebSocket close codes from the range kept for applications (4000–4999, RFC 6455 §7.4.2).
 * Each failure has its own code and a sentence that says what to do.
 */
export const CLOSE = {
  'bad-frame': { code: 4400, sentence: 'A message was no valid frame.', retry: true },
  'pass-invalid': {
    code: 4401,
    sentence: 'The pass is not signed by this overlay. Enrol again.',
    retry: true,
  },
  'pass-expired': {
    code: 4402,
    sentence: 'The pass has expired. Reach the collector for a new one.',
    retry: true,
  },
  'pass-of-another-overlay': { code: 4403, sentence: 'The pass is for another overlay.', retry: false },
  'pass-of-another-agent': { code: 4404, sentence: 'The pass belongs to another key.', retry: false },
  'proof-wrong': { code: 4405, sentence: 'The signature does not match this exchange and key.', retry: true },
  'own-id': {
    code: 4406,
    sentence: 'This address is the agent itself. Correct the neighbour list.',
    retry: false,
  },
  'version-mismatch': {
    code: 4407,
    sentence: 'No version of the link protocol in common. Update.',
    retry: false,
  },
  'handshake-timeout': { code: 4408, sentence: 'The handshake took too long.', retry: true },
  'duplicate-link': { code: 4409, sentence: 'Another connection of this pair stays.', retry: true },
  'not-a-hello': { code: 4410, sentence: 'The first message was no hello.', retry: true },
  'too-large': { code: 4411, sentence: 'A message was larger than allowed.', retry: true },
  'counter-fell': { code: 4412, sentence: 'A counter fell, which counters never do.', retry: true },
  'counter-exceeded': { code: 4413, sentence: 'More was acknowledged than was sent.', retry: true },
  'unexpected-agent': { code: 4414, sentence: 'Another agent answers at this address.', retry: true },
  'stale-incarnation': { code: 4415, sentence: 'A later start of this agent is known.', retry: true },
  'going-away': { code: 4416, sentence: 'The agent is stopping.', retry: true },
  'not-a-neighbour': { code: 4417, sentence: 'Not a neighbour here. Add it at this end too.', retry: true },
  silent: { code: 4418, sentence: 'Nothing was heard for too long.', retry: true },
  'too-many': { code: 4419, sentence: 'Too many connections wait for their handshake.', retry: true },
  'link-removed': { code: 4421, sentence: 'The link was taken down; all walkers have arrived.', retry: true },
  revoked: { code: 4420, sentence: 'The agent was revoked.', retry: false },
  'too-fast': { code: 4422, sentence: 'More frames came than the pace allows.', retry: true },
  'orders-forged': { code: 4423, sentence: 'Orders came that the overlay did not sign.', retry: false },
  'left-overlay': { code: 4424, sentence: 'The agent has left the overlay.', retry: false },
  'left-out': {
    code: 4425,
    sentence: 'The figures of this agent do not hold. Its operators must look into it.',
    retry: false,
  },
  replayed: { code: 4427, sentence: 'This hello was said and proven before.', retry: true },
  'too-many-links': { code: 4426, sentence: 'This agent has as many links as it may.', retry: true },
} as const satisfies Record<string, { code: number; sentence: string; retry: boolean }>

export type CloseName = keyof typeof CLOSE

const NAMES = new Map<number, CloseName>()
for (const name of Object.keys(CLOSE)) {
  if (isCloseName(name)) NAMES.set(CLOSE[name].code, name)
}

function isCloseName(name: string): name is CloseName {
  return name in CLOSE
}

/** The name of a close code, or null for one that is none of ours. */
export function closeName(code: number): CloseName | null {
  return NAMES.get(code) ?? null
}
