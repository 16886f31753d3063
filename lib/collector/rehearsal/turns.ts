import type { OpenRehearsal } from './open'

/** Those that run, then the longest due; the teams of an overlay take turns, so that none waits for all of another's. */
export function inTurn(due: readonly OpenRehearsal[]): OpenRehearsal[] {
  const running = due.filter(({ state }) => state === 'running')
  const before = new Map<string, number>()
  const place = ({ teamId }: OpenRehearsal): number => {
    const places = before.get(teamId) ?? 0
    before.set(teamId, places + 1)
    return places
  }
  for (const row of running) place(row)
  const waiting = due.filter(({ state }) => state !== 'running').map((row) => ({ row, at: place(row) }))
  return [...running, ...waiting.sort((a, b) => a.at - b.at).map(({ row }) => row)]
}
