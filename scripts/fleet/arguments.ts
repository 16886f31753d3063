import { parseArgs } from 'node:util'
import { PACE_NAMES, type PaceName } from '@/lib/method/pace'

export interface FleetArguments {
  topology: string
  collector: string
  code: string
  labels: string | null
  pace: PaceName | undefined
  weights: 'unit' | 'delivered' | undefined
  quiet: boolean
}

export const USAGE =
  'npm run fleet -- --topology edges.csv --collector URL --code CODE [--labels nodes.csv]\n' +
  `              [--pace ${PACE_NAMES.join('|')}] [--weights unit|delivered] [--quiet]\n` +
  'obeys: cut a b, join a b, weaken a b 0.4, stop a, start a, exact,\n' +
  '       silence a (it does not reach the collector, neither itself nor through neighbours),\n' +
  '       detour a (not itself; neighbours may carry its reports), heard a (it does again)\n'

export type FleetArgumentsResult = { ok: true; args: FleetArguments } | { ok: false; issue: string }

export function readFleetArguments(argv: readonly string[]): FleetArgumentsResult {
  try {
    const { values } = parseArgs({
      args: [...argv],
      strict: true,
      options: {
        topology: { type: 'string' },
        collector: { type: 'string' },
        code: { type: 'string' },
        labels: { type: 'string' },
        pace: { type: 'string' },
        weights: { type: 'string' },
        quiet: { type: 'boolean', default: false },
      },
    })
    const { topology, collector, code, pace, weights } = values
    if (!topology || !collector || !code) {
      return { ok: false, issue: 'The fleet needs --topology, --collector and --code.' }
    }
    const paceName = PACE_NAMES.find((name) => name === pace)
    if (pace !== undefined && !paceName) return { ok: false, issue: `There is no pace "${pace}".` }
    if (weights !== undefined && weights !== 'unit' && weights !== 'delivered') {
      return { ok: false, issue: `Weights are unit or delivered, not "${weights}".` }
    }
    return {
      ok: true,
      args: {
        topology,
        collector,
        code,
        labels: values.labels ?? null,
        pace: paceName,
        weights,
        quiet: values.quiet,
      },
    }
  } catch (error) {
    return { ok: false, issue: error instanceof Error ? error.message : String(error) }
  }
}
