import { createHmac } from 'node:crypto'

/** Crockford's base 32 in small letters (alphabet from memory). */
const ALPHABET = '0123456789abcdefghjkmnpqrstvwxyz'
const BITS_PER_CHARACTER = 5
const PREFIX = 'partner node '
const ROUNDS = 10

/** Beyond a million agents names are longer. */
const SHORT_BITS = 20
const LONG_BITS = 30

/**
 * What a team calls another team's node. A keyed permutation of the node's number: no two nodes have one name, a node has
 * the same one for ever, and neither the number nor what a second team calls the node follows from it without the key.
 * A balanced Feistel network (Luby and Rackoff, "How to construct pseudorandom permutations from pseudorandom functions",
 * 1988) of ten rounds of HMAC-SHA-256; ten as in FF1 of NIST SP 800-38G, which is for such small sets (both from memory).
 * @param secret the overlay's @param viewer the team that looks
 */
export function pseudonymOf(secret: string, viewer: string, number: number): string {
  const bits = number < 2 ** SHORT_BITS ? SHORT_BITS : LONG_BITS
  const key = createHmac('sha256', secret).update(viewer).digest()
  let value = permute(key, number, bits)
  let characters = ''
  for (let left = bits / BITS_PER_CHARACTER; left > 0; left--) {
    characters = ALPHABET.charAt(value % ALPHABET.length) + characters
    value = Math.floor(value / ALPHABET.length)
  }
  return PREFIX + characters
}

/** No node may enrol under a name that could be taken for one. */
export function isPseudonym(name: string): boolean {
  return name.trim().toLowerCase().startsWith(PREFIX.trim())
}

function permute(key: Buffer, number: number, bits: number): number {
  const half = 2 ** (bits / 2)
  let [left, right] = [Math.floor(number / half), number % half]
  for (let round = 0; round < ROUNDS; round++) {
    const mixed = createHmac('sha256', key).update(`${bits} ${round} ${right}`).digest().readUInt32BE(0)
    ;[left, right] = [right, (left + mixed) % half]
  }
  return left * half + right
}
