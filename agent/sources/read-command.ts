import { parseItems } from './items'
import type { PathStep } from './path-expression'
import type { SpawnProgram } from './program'
import type { ReadList } from './source'

export const COMMAND_TIMEOUT_MS = 10_000
export const MAX_OUTPUT_BYTES = 1024 * 1024

export function commandReader(
  { runProgram }: { runProgram: SpawnProgram },
  { command, steps }: { command: readonly string[]; steps: readonly PathStep[] | null },
): ReadList {
  return async (signal) => {
    const limits = { timeoutMs: COMMAND_TIMEOUT_MS, maxOutputBytes: MAX_OUTPUT_BYTES }
    const result = await runProgram(command, { ...limits, signal })
    return result.ok ? parseItems(result.output, steps) : result
  }
}
