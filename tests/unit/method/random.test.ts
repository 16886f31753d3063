import { describe, expect, it } from 'vitest'
import { createRandom, forkRandom, hash32, murmur32, randomFromState } from '@/lib/method/random'

const take = (count: number, next: () => number) => Array.from({ length: count }, next)

/** Text whose UTF-16LE bytes are the given ASCII bytes (an even number of them). */
const packed = (ascii: string) =>
  String.fromCharCode(
    ...take(ascii.length / 2, () => 0).map(
      (_, i) => ascii.charCodeAt(2 * i) | (ascii.charCodeAt(2 * i + 1) << 8),
    ),
  )

describe('createRandom', () => {
  it('gives the outputs of the reference code for state 1, 2, 3, 4', () => {
    // The test vector of the Rust crate rand_xoshiro for Xoshiro128StarStar, made there with the authors' C code.
    const random = randomFromState(1, 2, 3, 4)
    expect(take(10, () => random.uint32())).toEqual([
      11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597, 4258142804,
    ])
  })

  it('repeats itself for the same seed and differs for 1 and "1"', () => {
    const stream = (seed: number | string) => {
      const random = createRandom(seed)
      return take(4, () => random.uint32())
    }
    expect(stream(1)).toEqual(stream(1))
    expect(stream(1)).not.toEqual(stream('1'))
    expect(stream(1)).not.toEqual(stream(2))
  })

  it('does not stand still when every state word is zero', () => {
    const random = randomFromState(0, 0, 0, 0)
    expect(new Set(take(10, () => random.uint32())).size).toBeGreaterThan(5)
  })

  it('spreads uniform() evenly over [0, 1) down to the lowest of its 53 bits', () => {
    const random = createRandom('even')
    const tenths = new Array<number>(10).fill(0)
    let odd = 0
    for (let i = 0; i < 100_000; i++) {
      const value = random.uniform()
      expect(value).toBeLessThan(1)
      tenths[Math.floor(value * 10)]!++
      odd += (value * 2 ** 53) % 2
    }
    const chiSquare = tenths.reduce((sum, count) => sum + (count - 10_000) ** 2 / 10_000, 0)
    expect(chiSquare).toBeLessThan(33.7) // 9 degrees of freedom, 1 in 10⁴
    expect(Math.abs(odd - 50_000)).toBeLessThan(4 * Math.sqrt(25_000))
  })
})

describe('forkRandom', () => {
  it('makes streams that differ by label and by the moment of the fork, and repeat', () => {
    const first = (label: string, skip: number) => {
      const random = createRandom(7)
      take(skip, () => random.uint32())
      return forkRandom(random, label).uint32()
    }
    expect(first('tar-01', 0)).toBe(first('tar-01', 0))
    expect(new Set([first('tar-01', 0), first('tar-02', 0), first('tar-01', 1)]).size).toBe(3)
  })
})

describe('murmur32', () => {
  it('agrees with published MurmurHash3_x86_32 values', () => {
    // Values of the reference code as listed in the Wikipedia article "MurmurHash"; from memory.
    expect(murmur32('', 0)).toBe(0)
    expect(murmur32('', 1)).toBe(0x514e28b7)
    expect(murmur32(packed('test'), 0)).toBe(0xba6bd213)
  })
})

describe('hash32', () => {
  it('tells apart how parts are split and what type they have', () => {
    const all = [
      hash32('ab', 'c'),
      hash32('a', 'bc'),
      hash32('abc'),
      hash32(1),
      hash32('1'),
      hash32(1, ''),
      hash32(),
    ]
    expect(new Set(all).size).toBe(all.length)
  })

  it('flips about half of the output bits when one part changes by one', () => {
    let flipped = 0
    for (let salt = 0; salt < 2000; salt++) {
      let difference = hash32(salt, 0, 'tar-01') ^ hash32(salt + 1, 0, 'tar-01')
      for (; difference !== 0; difference &= difference - 1) flipped++
    }
    expect(flipped / 2000).toBeGreaterThan(15.5)
    expect(flipped / 2000).toBeLessThan(16.5)
  })

  it('puts agents on halves like fair, independent coins', () => {
    const names = take(36, () => 0).map((_, i) => `tar-${i}`)
    let same = 0
    const sizes: number[] = []
    for (let salt = 0; salt < 4000; salt++) {
      const half = names.map((name) => hash32(salt, 0, name) & 1)
      const other = names.map((name) => hash32(salt, 1, name) & 1)
      sizes.push(half.reduce((sum, bit) => sum + bit, 0))
      same += half.filter((bit, i) => bit === other[i]).length
    }
    const mean = sizes.reduce((sum, size) => sum + size, 0) / sizes.length
    const variance = sizes.reduce((sum, size) => sum + (size - mean) ** 2, 0) / sizes.length
    expect(Math.abs(mean - 18)).toBeLessThan(4 * Math.sqrt(9 / 4000))
    expect(Math.abs(variance - 9)).toBeLessThan(4 * 9 * Math.sqrt(2 / 4000))
    expect(Math.abs(same - 72_000)).toBeLessThan(4 * Math.sqrt(36_000))
  })
})
