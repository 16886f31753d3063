import { hash, randomBytes } from 'node:crypto'

/** 256 bits, base64url. Always from the system's generator: a secret that can be seeded is none. */
export function newSecret(): string {
  return randomBytes(32).toString('base64url')
}

/** Standard Webhooks 1.0: "whsec_" and the base64 of 24 to 64 bytes (from memory). */
export function newWebhookSecret(): string {
  return `whsec_${randomBytes(32).toString('base64')}`
}

export function sha256Hex(text: string): string {
  return hash('sha256', text)
}

/** Crockford's base 32: no I, L, O, U (alphabet from memory). */
const ALPHABET = '0123456789ABCDEFGHJKMNPQRSTVWXYZ'
const GROUPS = 4
const GROUP_LENGTH = 5

/** 100 random bits as four groups of five characters, such as 7K2QX-0M9TB-…. */
export function newJoiningCode(): string {
  const characters = [...randomBytes(GROUPS * GROUP_LENGTH)].map((byte) => ALPHABET[byte % ALPHABET.length])
  return Array.from({ length: GROUPS }, (_, group) =>
    characters.slice(group * GROUP_LENGTH, (group + 1) * GROUP_LENGTH).join(''),
  ).join('-')
}

/** How a typed code is compared: case, hyphens, spaces and look-alike letters do not matter. */
export function canonicalJoiningCode(typed: string): string {
  return typed.toUpperCase().replace(/[\s-]/g, '').replaceAll('O', '0').replace(/[IL]/g, '1')
}

export function hashJoiningCode(typed: string): string {
  return sha256Hex(canonicalJoiningCode(typed))
}
