import type { Role } from '@/lib/auth/permissions'

export const TEAM = 'Harbourline Co-operative'

export interface Person {
  name: string
  email: string
  role: Role
}

export const PEOPLE: readonly Person[] = [
  { name: 'R. Quill', email: 'r.quill@harbourline.example', role: 'owner' },
  { name: 'S. Ferrier', email: 's.ferrier@harbourline.example', role: 'operator' },
  { name: 'J. Marrow', email: 'j.marrow@harbourline.example', role: 'viewer' },
]

const WORDS = [
  'anchor ballast beacon berth bollard buoy capstan channel chart cleat compass current dinghy ebb estuary',
  'fathom fender ferry galley gunwale halyard hawser hull jetty keel lantern ledger lighter marina mast',
  'mooring oar oilskin pilot pontoon quay reef rigging rudder sextant shoal slipway sounding spring stern',
  'tackle tender tide tiller transom trawler tug wharf winch windlass',
]
  .join(' ')
  .split(' ')
const PASSWORD_WORDS = 4

/** Four words, easy to type; made anew for each data folder, as a password that everyone knows protects nothing. */
export function newPassword(randomBytes: (count: number) => Uint8Array): string {
  const words: string[] = []
  while (words.length < PASSWORD_WORDS) {
    // Without the bytes that would favour the first words.
    const byte = randomBytes(1)[0]!
    if (byte < 256 - (256 % WORDS.length)) words.push(WORDS[byte % WORDS.length]!)
  }
  return words.join('-')
}
