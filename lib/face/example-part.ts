const FROM = /^.*\/\/ shown from here.*\n/m
const TO = /^.*\/\/ shown to here[\s\S]*/m

/** The part of a source file that is shown: between its two marks, or the whole where it has none. */
export function partMarked(source: string): string {
  const from = FROM.exec(source)
  const rest = from ? source.slice(from.index + from[0].length) : source
  return rest.replace(TO, '').trim()
}
