import { availableParallelism } from 'node:os'

/** More would wait for the database, which has as much to do as two of them. */
const MOST_UNASKED = 4

/** How many processes take reports in: INGEST_PROCESSES, or one for each processor. @throws where it is no such number */
export function processesWanted(
  env: Readonly<Record<string, string | undefined>>,
  cores = availableParallelism(),
): number {
  const text = env.INGEST_PROCESSES
  if (!text) return Math.min(cores, MOST_UNASKED)
  if (/^[1-9]\d?$/.test(text)) return Number(text)
  throw new Error(
    `Set INGEST_PROCESSES to how many processes take reports in, 1 to 99; "${text}" is no such number.`,
  )
}
