import { type Fleet, FleetError } from './fleet'

/** What the fleet obeys, one per line, and what each needs. */
const COMMANDS: Record<string, { needs: string[]; run: (fleet: Fleet, args: string[]) => Promise<object> }> =
  {
    cut: { needs: ['a', 'b'], run: async (fleet, [a, b]) => ({ done: await fleet.cut(a!, b!) }) },
    join: { needs: ['a', 'b'], run: async (fleet, [a, b]) => ({ done: await fleet.join(a!, b!) }) },
    weaken: {
      needs: ['a', 'b', 'weight'],
      run: async (fleet, [a, b, weight]) => ({ done: fleet.weaken(a!, b!, Number(weight)) }),
    },
    stop: { needs: ['a'], run: async (fleet, [a]) => ({ done: await fleet.stopAgent(a!) }) },
    start: { needs: ['a'], run: async (fleet, [a]) => ({ done: await fleet.startAgent(a!) }) },
    silence: { needs: ['a'], run: async (fleet, [a]) => ({ done: fleet.silence(a!) }) },
    detour: { needs: ['a'], run: async (fleet, [a]) => ({ done: fleet.detour(a!) }) },
    heard: { needs: ['a'], run: async (fleet, [a]) => ({ done: fleet.hear(a!) }) },
    exact: { needs: [], run: async (fleet) => fleet.exact() },
  }

/** Obeys one line. @returns one object to print: `ok`, the command, and the result or what is wrong */
export async function obey(fleet: Fleet, line: string): Promise<object> {
  const [command = '', ...args] = line.trim().split(/\s+/)
  const known = Object.hasOwn(COMMANDS, command) ? COMMANDS[command] : undefined
  if (!known) {
    return { ok: false, command, error: `Unknown. There are: ${Object.keys(COMMANDS).join(', ')}.` }
  }
  if (args.length !== known.needs.length) {
    return { ok: false, command, error: `Write: ${[command, ...known.needs].join(' ')}` }
  }
  try {
    const result = await known.run(fleet, args)
    return { ok: true, command, ...(args.length > 0 ? { args } : {}), ...result }
  } catch (error) {
    if (error instanceof FleetError || error instanceof Error) {
      return { ok: false, command, args, error: error.message }
    }
    throw error
  }
}
