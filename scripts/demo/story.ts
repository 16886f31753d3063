import { createRandom } from '@/lib/method/random'
import { type Harbourline, isFar, LAST_LINKS } from './topology'

/** One command of the fleet, as `npm run fleet` obeys it, at a time of the loop. */
export interface StoryStep {
  atSeconds: number
  command: string
}

export interface Story {
  loopSeconds: number
  steps: StoryStep[]
}

export const FIRM_SECONDS = 315
/**
 * Links go in groups, one soon after the other. Between groups there is time for a reading to settle: about 12 s at
 * steady pace. Spread evenly, no reading of the whole thinning would be fresh, and no trend told.
 */
export const GROUP = 3
export const SECONDS_PER_GROUP = 36
export const SECONDS_PER_LINK = 4
/** What a link that is about to go delivers in its last moments. */
export const LAST_WEIGHT = 0.4
export const SILENCE_AT_SECONDS = 585
export const SILENCE_SECONDS = 40
export const RETURN_AT_SECONDS = 650
export const SECONDS_PER_RETURN = 2
export const LOOP_SECONDS = 720

/**
 * What happens to Harbourline, over and over: firm; the links across weaken and go one by one until three are left; one
 * side falls silent for a moment; all links return. The state at the end is the state at the beginning.
 */
export function harbourlineStory(scenario: Harbourline): Story {
  const going = linksThatGo(scenario)
  const thinning = going.flatMap(({ a, b }, index): StoryStep[] => {
    const group = Math.floor(index / GROUP)
    const atSeconds = FIRM_SECONDS + group * SECONDS_PER_GROUP + (index % GROUP) * SECONDS_PER_LINK
    return [
      { atSeconds, command: `weaken ${a} ${b} ${LAST_WEIGHT}` },
      { atSeconds: atSeconds + SECONDS_PER_LINK / 2, command: `cut ${a} ${b}` },
    ]
  })
  const worn = LAST_LINKS.filter(({ weight }) => weight < 1)
  const thinnedAtSeconds = (thinning[thinning.length - 1]?.atSeconds ?? FIRM_SECONDS) + SECONDS_PER_LINK
  const far = scenario.nodes.filter(isFar)
  const returning = [
    ...worn.map(({ a, b }) => `weaken ${a} ${b} 1`),
    ...going.map(({ a, b }) => `join ${a} ${b}`).reverse(),
  ]
  return {
    loopSeconds: LOOP_SECONDS,
    steps: [
      ...thinning,
      ...worn.map(({ a, b, weight }) => ({
        atSeconds: thinnedAtSeconds,
        command: `weaken ${a} ${b} ${weight}`,
      })),
      ...far.map(({ name }) => ({ atSeconds: SILENCE_AT_SECONDS, command: `silence ${name}` })),
      ...far.map(({ name }) => ({
        atSeconds: SILENCE_AT_SECONDS + SILENCE_SECONDS,
        command: `heard ${name}`,
      })),
      ...returning.map((command, index) => ({
        atSeconds: RETURN_AT_SECONDS + index * SECONDS_PER_RETURN,
        command,
      })),
    ],
  }
}

/** The links across but the last three, in the order in which they go. */
export function linksThatGo({ links }: Harbourline): { a: string; b: string }[] {
  const stays = new Set(LAST_LINKS.map(({ a, b }) => `${a} ${b}`))
  const going = links.filter(({ a, b, across }) => across && !stays.has(`${a} ${b}`))
  const random = createRandom('harbourline story')
  return going
    .map(({ a, b }) => ({ link: { a, b }, order: random.uint32() }))
    .sort((x, y) => x.order - y.order)
    .map(({ link }) => link)
}
