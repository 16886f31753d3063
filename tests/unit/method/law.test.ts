import { describe, expect, it } from 'vitest'
import {
  birthRates,
  encounterRate,
  LOOP_GAIN,
  lambdaWalkedFor,
  nextLinkTimePerSecond,
  wantedLinkTimePerSecond,
} from '@/lib/method/control/law'
import { PACES } from '@/lib/method/pace'

const T = 0.5
const base = {
  deathRate: 0.2,
  populationX: 1000,
  populationY: 1000,
  target: 1000,
  intervalLinkTime: T,
  tickLinkTime: 0,
}

describe('birth rates', () => {
  const table: [string, Partial<typeof base>, { birthRateX: number; birthRateY: number }][] = [
    ['replace what dies when populations are as wanted', {}, { birthRateX: 0.2, birthRateY: 0.2 }],
    [
      'add the known factor 1/(1−hλ) of linear ticks',
      { tickLinkTime: 0.5 },
      { birthRateX: 0.2 / 0.9, birthRateY: 0.2 / 0.9 },
    ],
    [
      'lead a halved population back at 0.15 per interval per e-fold',
      { populationX: 500, populationY: 500 },
      { birthRateX: 0.2 + (0.15 * Math.LN2) / T, birthRateY: 0.2 + (0.15 * Math.LN2) / T },
    ],
    [
      'never lead back faster than 0.15 per interval',
      { populationX: 1, populationY: 1 },
      { birthRateX: 0.2 + 0.15 / T, birthRateY: 0.2 + 0.15 / T },
    ],
    [
      'never exceed a common rate of 0.4 per interval',
      { deathRate: 50 },
      { birthRateX: 0.4 / T, birthRateY: 0.4 / T },
    ],
    [
      'steer the imbalance to 0: the richer type is born less',
      { populationX: 1200, populationY: 800 },
      {
        birthRateX: 0.2 - ((0.2 + 0.25 / T) * 400) / 2400,
        birthRateY: 0.2 + ((0.2 + 0.25 / T) * 400) / 1600,
      },
    ],
    [
      'are fewer for both types where one is nearly gone',
      { populationX: 1800, populationY: 200 },
      { birthRateX: 0.08 - ((0.08 + 0.25 / T) * 1600) / 3600, birthRateY: 0.6 / T },
    ],
    [
      'cull the richer type when it is much too many',
      { populationX: 3000, populationY: 3000, deathRate: 0 },
      { birthRateX: -0.15 / T, birthRateY: -0.15 / T },
    ],
    [
      'are held within 0.6 per interval for either type',
      { populationX: 10, populationY: 3000, deathRate: 1 },
      { birthRateX: 0.6 / T, birthRateY: expect.any(Number) as unknown as number },
    ],
  ]
  it.each(table)('%s', (_, input, expected) => {
    const { birthRateX, birthRateY } = birthRates({ ...base, ...input })
    expect(birthRateX).toBeCloseTo(expected.birthRateX, 12)
    if (typeof expected.birthRateY === 'number') expect(birthRateY).toBeCloseTo(expected.birthRateY, 12)
    expect(Math.abs(birthRateY)).toBeLessThanOrEqual(0.6 / T)
  })
})

describe('ω', () => {
  const wanted = (lambda: number): number => (LOOP_GAIN * 1000) / (lambda * 2 * PACES.steady.intervalMs)
  it.each([
    ['stays where nothing is known of λ₂', 0.1, null, 0.1],
    ['is the loop gain over λ₂ and two intervals', wanted(0.4), 0.4, wanted(0.4)],
    ['falls to a fifth at most in one step', 1, 100, 0.2],
    ['doubles at most in one step', 0.1, 0.001, 0.2],
    ['stays while it is near what is wanted', 1.1 * wanted(0.4), 0.4, 1.1 * wanted(0.4)],
    ['goes to one unit of link time per tick where λ₂ is 0', 4, 0, 5],
    ['never exceeds one unit of link time per tick', 6, 0, 5],
  ])('%s', (_, current, lambda, expected) => {
    expect(nextLinkTimePerSecond(current, lambda, PACES.steady)).toBeCloseTo(expected, 12)
  })
})

describe('encounters', () => {
  it.each([
    ['are twice the mean weighted degree per walker of one type', 1, 0.08],
    ['are as many per walker where there are fewer', 0.5, 0.16],
    ['are no more than for a tenth of them', 0.001, 0.8],
    ['are no fewer where there are more', 3, 0.08],
    ['are for all that are wanted while nothing is known', undefined, 0.08],
  ])('%s', (_, filled, rate) => expect(encounterRate(8, 200, filled)).toBeCloseTo(rate, 12))
})

it('the λ that ω was chosen for is the one it was chosen by', () => {
  for (const lambda of [0.5, 1.35, 3]) {
    const linkTimePerSecond = wantedLinkTimePerSecond(lambda, PACES.steady)
    expect(lambdaWalkedFor(linkTimePerSecond, PACES.steady)).toBeCloseTo(lambda, 12)
  }
})
