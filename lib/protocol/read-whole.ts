import { z } from 'zod'

/** Both ends are of the range. */
export interface Range {
  least: number
  most: number
}
export const COUNT: Range = { least: 0, most: Number.MAX_SAFE_INTEGER }
/** Fixed point, of either sign. */
export const FIXED: Range = { least: Number.MIN_SAFE_INTEGER, most: Number.MAX_SAFE_INTEGER }
export const BIT: Range = { least: 0, most: 1 }

/** A value of which nothing is known but which names it should have. */
export type Unread<T> = { readonly [K in keyof T]?: unknown }
type Read<T> = (from: Unread<T>, reader: WholeReader) => T

/**
 * A schema for objects of little but whole numbers, read name by name: a shape for each number takes ten times as long
 * (zod 4.6), and reports are little but numbers. What `read` does not take is left away.
 */
export const wholeObject = <T>(read: Read<T>): z.ZodType<T> =>
  z.custom<T>().check((payload) => {
    payload.value = new WholeReader(payload.issues).object(payload.value, read)
  })

/** Reads numbers, and notes each that is not as it should be with where it stands. What it then gives back is of no use. */
export class WholeReader {
  private readonly path: PropertyKey[] = []

  constructor(private readonly issues: z.core.$ZodRawIssue[]) {}

  whole(value: unknown, range: Range, at: PropertyKey): number {
    if (isWhole(value, range)) return value
    this.fail(`Expected a whole number from ${range.least} to ${range.most}.`, value, at)
    return Number.NaN
  }

  wholes(value: unknown, most: number, range: Range, at: PropertyKey): readonly number[] {
    return this.listOf(value, most, at, (list) => list.map((each, index) => this.whole(each, range, index)))
  }

  object<T>(value: unknown, read: Read<T>, at?: PropertyKey): T {
    if (at !== undefined) this.path.push(at)
    const isObject = typeof value === 'object' && value !== null && !Array.isArray(value)
    if (!isObject) this.fail('Expected an object.', value)
    const object = read(isObject ? value : {}, this)
    if (at !== undefined) this.path.pop()
    return object
  }

  objects<T>(value: unknown, most: number, read: Read<T>, at: PropertyKey): T[] {
    return this.listOf(value, most, at, (list) => list.map((each, index) => this.object(each, read, index)))
  }

  fail(message: string, input: unknown, ...at: PropertyKey[]): void {
    this.issues.push({ code: 'custom', input, path: [...this.path, ...at], message })
  }

  private listOf<T>(
    value: unknown,
    most: number,
    at: PropertyKey,
    read: (list: readonly unknown[]) => T[],
  ): T[] {
    this.path.push(at)
    const isList = Array.isArray(value) && value.length <= most
    if (!isList) this.fail(`Expected a list of at most ${most}.`, value)
    const list = read(isList ? value : [])
    this.path.pop()
    return list
  }
}

const isWhole = (value: unknown, { least, most }: Range): value is number =>
  typeof value === 'number' && Number.isSafeInteger(value) && value >= least && value <= most
