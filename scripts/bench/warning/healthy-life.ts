import type { Random } from '@/lib/method/random'

/** What life does to an overlay: the simulation can, and so can the bare graph of the surrogate. */
export interface Liveable {
  weaken(a: number, b: number, weight: number): void
  cut(a: number, b: number): void
  join(a: number, b: number, weight: number): void
  stop(node: number): void
  start(node: number): void
}

export interface LifeInit {
  nodes: number
  links: readonly { a: number; b: number }[]
  /** Hour of the day at which it begins. */
  startHour: number
}

const DAY_MINUTES = 1440
/** At the day's worst hour links carry this much less. */
export const LOAD_SAG = 0.12
const LOAD_EVERY_MINUTES = 10
/** Links lost a day, for each 100 links; each comes back after 5 to 45 minutes. */
export const LOST_LINKS_PER_DAY = 12
const LOST_MINUTES = [5, 45] as const
/** Restarts out of turn, a day and overlay. */
export const RESTARTS_PER_DAY = 6
/** A restart takes one minute, and in a rolling one every second minute has its node. */
const ROLLING_EVERY_MINUTES = 2
/** One rolling restart a day, beginning at this hour. */
const ROLLING_HOUR = 9.5

/** A healthy overlay's days: links lost and back, nodes restarted alone and in turn, links that sag with the day's load. */
export class HealthyLife {
  readonly #random: Random
  readonly #init: LifeInit
  readonly #gone = new Map<number, number>()
  readonly #down = new Map<number, number>()
  #minute = 0

  constructor({ random }: { random: Random }, init: LifeInit) {
    this.#random = random
    this.#init = init
  }

  /** One more minute begins. */
  minute(overlay: Liveable): void {
    const minute = this.#minute++
    const ofDay = (minute + Math.round(this.#init.startHour * 60)) % DAY_MINUTES
    this.#comeBack(minute, ofDay, overlay)
    if (ofDay % LOAD_EVERY_MINUTES === 0) this.#load(ofDay, overlay)
    this.#lose(minute, overlay)
    const sinceRolling = ofDay - ROLLING_HOUR * 60
    const inTurn = sinceRolling / ROLLING_EVERY_MINUTES
    if (sinceRolling >= 0 && Number.isInteger(inTurn) && inTurn < this.#init.nodes)
      this.#restart(inTurn, minute, overlay)
    if (this.#random.uniform() < RESTARTS_PER_DAY / DAY_MINUTES)
      this.#restart(this.#below(this.#init.nodes), minute, overlay)
  }

  #weight(ofDay: number): number {
    return 1 - (LOAD_SAG / 2) * (1 - Math.cos((2 * Math.PI * (ofDay - 180)) / DAY_MINUTES))
  }

  #load(ofDay: number, overlay: Liveable): void {
    for (const [index, { a, b }] of this.#init.links.entries())
      if (!this.#gone.has(index)) overlay.weaken(a, b, this.#weight(ofDay))
  }

  #lose(minute: number, overlay: Liveable): void {
    const { links } = this.#init
    const perMinute = (LOST_LINKS_PER_DAY * links.length) / 100 / DAY_MINUTES
    if (this.#random.uniform() >= perMinute) return
    const index = this.#below(links.length)
    if (this.#gone.has(index)) return
    const [least, most] = LOST_MINUTES
    this.#gone.set(index, minute + Math.round(least + this.#random.uniform() * (most - least)))
    overlay.cut(links[index]!.a, links[index]!.b)
  }

  #restart(node: number, minute: number, overlay: Liveable): void {
    if (this.#down.has(node)) return
    this.#down.set(node, minute + 1)
    overlay.stop(node)
  }

  #comeBack(minute: number, ofDay: number, overlay: Liveable): void {
    for (const [node, dueMinute] of this.#down)
      if (minute >= dueMinute) {
        this.#down.delete(node)
        overlay.start(node)
      }
    for (const [index, dueMinute] of this.#gone)
      if (minute >= dueMinute) {
        this.#gone.delete(index)
        const { a, b } = this.#init.links[index]!
        overlay.join(a, b, this.#weight(ofDay))
      }
  }

  #below(limit: number): number {
    return Math.floor(this.#random.uniform() * limit)
  }
}
