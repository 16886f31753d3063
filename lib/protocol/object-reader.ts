import { z } from 'zod'

/** Of numbers, or of the length of a text. Both ends are of the range. */
export interface Range {
  least: number
  most: number
}
export const COUNT: Range = { least: 0, most: Number.MAX_SAFE_INTEGER }
/** Fixed point, of either sign. */
export const FIXED: Range = { least: Number.MIN_SAFE_INTEGER, most: Number.MAX_SAFE_INTEGER }
export const BIT: Range = { least: 0, most: 1 }
/** For numbers that need not be whole. */
export const SHARE: Range = { least: 0, most: 1 }

/** So many are noted in one object: whoever sends thousands that are wrong need not be told of each. */
const MOST_ISSUES = 20

/** A value of which nothing is known but which names it should have. */
export type Unread<T> = { readonly [K in keyof T]?: unknown }
type Read<T> = (from: Unread<T>, reader: ObjectReader) => T

/**
 * A schema for objects that are read name by name: thousands of reports come in a second, of a hundred numbers each, and a schema for each
 * number takes four times as long (zod 4.6). What `read` does not take is left away.
 */
export const objectReadBy = <T>(read: Read<T>): z.ZodType<T> =>
  z.custom<T>().check((payload) => {
    payload.value = new ObjectReader(payload.issues).object(payload.value, read)
  })

/** Reads values, and notes each that is not as it should be with where it stands. What it then gives back is of no use. */
export class ObjectReader {
  private readonly path: PropertyKey[] = []

  constructor(private readonly issues: z.core.$ZodRawIssue[]) {}

  whole(value: unknown, { least, most }: Range, at: PropertyKey): number {
    if (typeof value === 'number' && Number.isSafeInteger(value) && value >= least && value <= most)
      return value
    this.fail(`Expected a whole number from ${least} to ${most}.`, value, at)
    return Number.NaN
  }

  /** Neither NaN nor infinity is in any range of finite ends. */
  number(value: unknown, { least, most }: Range, at: PropertyKey): number {
    if (typeof value === 'number' && value >= least && value <= most) return value
    this.fail(`Expected a number from ${least} to ${most}.`, value, at)
    return Number.NaN
  }

  text(value: unknown, { least, most }: Range, at: PropertyKey): string {
    if (typeof value === 'string' && value.length >= least && isWithin(value, most)) return value
    this.fail(`Expected a text of ${least} to ${most} characters.`, value, at)
    return ''
  }

  oneOf<T extends string>(value: unknown, choices: readonly [T, ...T[]], at: PropertyKey): T {
    const known = choices.find((choice) => choice === value)
    if (known !== undefined) return known
    this.fail(`Expected one of ${choices.join(', ')}.`, value, at)
    return choices[0]
  }

  wholes(value: unknown, most: number, range: Range, at: PropertyKey): readonly number[] {
    return this.listOf(value, most, at, (list) => list.map((each, index) => this.whole(each, range, index)))
  }

  texts(value: unknown, most: number, length: Range, at: PropertyKey): readonly string[] {
    return this.listOf(value, most, at, (list) => list.map((each, index) => this.text(each, length, index)))
  }

  object<T>(value: unknown, read: Read<T>, at?: PropertyKey): T {
    if (at !== undefined) this.path.push(at)
    const isObject = typeof value === 'object' && value !== null && !Array.isArray(value)
    const noted = this.issues.length
    const object = read(isObject ? value : {}, this)
    if (!isObject) {
      // What is no object lacks every name, and that need not be said of each.
      this.issues.length = noted
      this.fail('Expected an object.', value)
    }
    if (at !== undefined) this.path.pop()
    return object
  }

  objects<T>(value: unknown, most: number, read: Read<T>, at: PropertyKey): T[] {
    return this.listOf(value, most, at, (list) => list.map((each, index) => this.object(each, read, index)))
  }

  /** Whether nothing was wrong so far. */
  get isGood(): boolean {
    return this.issues.length === 0
  }

  fail(message: string, input: unknown, ...at: PropertyKey[]): void {
    if (this.issues.length < MOST_ISSUES)
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

/** Code points count, not the units of UTF-16. */
const isWithin = (text: string, most: number): boolean =>
  text.length <= most || (text.length <= 2 * most && [...text].length <= most)
