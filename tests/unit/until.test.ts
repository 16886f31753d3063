import { describe, expect, it } from 'vitest'
import { Bell, isLike, until, within } from '../support/until'

const brief = { patienceMs: 30 }

describe('a wait', () => {
  it('that is in vain says what it was for', async () => {
    const tide = { isHigh: false }
    await expect(until(() => tide.isHigh, brief)).rejects.toThrow(
      /^Not within 0\.03 s: \(\) => tide\.isHigh$/,
    )
    await expect(new Bell().until(async () => tide.isHigh, brief)).rejects.toThrow('tide.isHigh')
    await expect(
      within('the ferry', new Promise(() => {}), { ...brief, explain: () => 'It is fog.' }),
    ).rejects.toThrow('the ferry\nIt is fog.')
  })

  it('ends as soon as it is so, and with the failure of a look', async () => {
    let looks = 0
    await until(async () => ++looks === 3)
    expect(looks).toBe(3)
    const failing = () => {
      throw new Error('no gauge')
    }
    await expect(until(failing)).rejects.toThrow('no gauge')
    expect(await within('a value', Promise.resolve(431))).toBe(431)
  })
})

describe('a bell', () => {
  it('wakes all that wait', async () => {
    const bell = new Bell()
    let isIn = false
    const both = Promise.all([bell.until(() => isIn), bell.until(() => isIn)])
    isIn = true
    bell.ring()
    await both
  })

  it('is heard by one that was just looking', async () => {
    const bell = new Bell()
    let looks = 0
    await bell.until(async () => {
      looks += 1
      if (looks === 1) bell.ring()
      return looks === 2
    })
    expect(looks).toBe(2)
  })
})

it('likeness is that of toMatchObject', () => {
  expect([isLike({ a: 1, b: 2 }, { a: 1 }), isLike({ a: 1 }, { a: 2 }), isLike(null, { a: 1 })]).toEqual([
    true,
    false,
    false,
  ])
})
