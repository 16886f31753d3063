/** A source of chance; whoever needs chance takes one as an argument. */
export interface Random {
  /** Uniform on [0, 1), 53 bit: a multiple of 2⁻⁵³, from two words. */
  uniform(): number
  /** Uniform integer in [0, 2³²). */
  uint32(): number
}

/**
 * xoshiro128** 1.1 by D. Blackman and S. Vigna ("Scrambled linear pseudorandom number generators",
 * ACM Trans. Math. Softw. 47, 2021; public-domain reference code xoshiro128starstar.c). Period 2¹²⁸ − 1.
 * Not for secrets.
 */
class Xoshiro128 implements Random {
  private s0: number
  private s1: number
  private s2: number
  private s3: number

  constructor(s0: number, s1: number, s2: number, s3: number) {
    // Zero is the generator's one fixed point.
    const dead = (s0 | s1 | s2 | s3) === 0
    this.s0 = dead ? 1 : s0 | 0
    this.s1 = s1 | 0
    this.s2 = s2 | 0
    this.s3 = s3 | 0
  }

  uint32(): number {
    const product = Math.imul(this.s1, 5)
    const result = Math.imul((product << 7) | (product >>> 25), 9) >>> 0
    const shifted = this.s1 << 9
    this.s2 ^= this.s0
    this.s3 ^= this.s1
    this.s1 ^= this.s2
    this.s0 ^= this.s3
    this.s2 ^= shifted
    this.s3 = (this.s3 << 11) | (this.s3 >>> 21)
    return result
  }

  uniform(): number {
    const high = this.uint32() >>> 5
    const low = this.uint32() >>> 6
    return (high * 0x4000000 + low) / 0x20000000000000
  }
}

/** The generator from its four state words. */
export function randomFromState(s0: number, s1: number, s2: number, s3: number): Random {
  return new Xoshiro128(s0, s1, s2, s3)
}

/** The same seed gives the same stream on every machine; 1 and '1' are different seeds. */
export function createRandom(seed: number | string): Random {
  return new Xoshiro128(hash32(0, seed), hash32(1, seed), hash32(2, seed), hash32(3, seed))
}

/** A stream of its own for `label`. Takes four words from `random`, so the order of forks matters. */
export function forkRandom(random: Random, label: number | string): Random {
  const word = (index: number) => hash32(index, label, random.uint32())
  return new Xoshiro128(word(0), word(1), word(2), word(3))
}

const NUMBER_TAG = 0x9e3779b9

/**
 * Well-mixed 32-bit hash of a list of parts, the same on every machine: each part is hashed by `murmur32`
 * seeded with the hash so far, so that ('ab', 'c') and ('a', 'bc') differ, and so do 1 and '1'.
 * Numbers are taken by their decimal text. Not for secrets.
 */
export function hash32(...parts: readonly (string | number)[]): number {
  let hash = 0
  for (const part of parts) {
    hash = typeof part === 'string' ? murmur32(part, hash) : murmur32(String(part), hash ^ NUMBER_TAG)
  }
  return hash
}

/**
 * MurmurHash3_x86_32 by A. Appleby (public domain) over the UTF-16LE bytes of `text`.
 * Returns an integer in [0, 2³²).
 */
export function murmur32(text: string, seed: number): number {
  let hash = seed | 0
  const pairs = text.length & ~1
  for (let at = 0; at < pairs; at += 2) {
    hash ^= scramble(text.charCodeAt(at) | (text.charCodeAt(at + 1) << 16))
    hash = Math.imul((hash << 13) | (hash >>> 19), 5) + 0xe6546b64
  }
  if (pairs < text.length) hash ^= scramble(text.charCodeAt(pairs))
  hash ^= text.length * 2
  hash = Math.imul(hash ^ (hash >>> 16), 0x85ebca6b)
  hash = Math.imul(hash ^ (hash >>> 13), 0xc2b2ae35)
  return (hash ^ (hash >>> 16)) >>> 0
}

function scramble(word: number): number {
  const product = Math.imul(word, 0xcc9e2d51)
  return Math.imul((product << 15) | (product >>> 17), 0x1b873593)
}
