import { createInterface } from 'node:readline'
import type { z } from 'zod'

export const delay = (seconds: number): Promise<void> =>
  new Promise((resolve) => setTimeout(resolve, 1000 * seconds))

/** A program that does what it is told on standard input, a job on each line of JSON, and prints a line of JSON for each. */
export async function doJobs<S extends z.ZodType>(
  schema: S,
  run: (job: z.output<S>) => Promise<object>,
): Promise<void> {
  for await (const line of createInterface({ input: process.stdin })) {
    const result = await run(schema.parse(JSON.parse(line)))
    process.stdout.write(`${JSON.stringify(result)}\n`)
  }
}
