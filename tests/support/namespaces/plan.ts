/**
 * A laboratory of network namespaces as `ip -batch` lines. Each node stands in a namespace of its own and has two
 * interfaces: `links` towards its half's bridge for links, and `reports` towards its half's bridge for the collector. The
 * bridges stand in one more namespace, so that deleting namespaces deletes everything:
 *
 *   nodes of half a ── la ══ lb ── nodes of half b          links, 198.18.SUBNET.0/24
 *   nodes of half a ── ra ══ rm ══ rb ── nodes of half b    reports, 198.19.SUBNET.0/24; the collector on ra, rm or rb
 *
 * Addresses are of the block for tests of network devices (RFC 2544, appendix C.2.2): nobody's.
 */
export interface LabPlan {
  /** Unique per run and short: interface names have at most 15 characters. */
  prefix: string
  subnet: number
  /** Node names of both halves. */
  halves: readonly [readonly string[], readonly string[]]
}

export type Half = 0 | 1
/** A stretch of cable between two bridges. */
export type Joint = 'links' | 'reports-a' | 'reports-b'
export type CollectorPlace = Half | 'outside'

const LINK_BRIDGES = ['la', 'lb'] as const
const REPORT_BRIDGES = ['ra', 'rb'] as const
const MIDDLE = 'rm'
/** One end of each joint; setting it down cuts the joint for both. */
const JOINTS: Record<Joint, { end: string; between: readonly [string, string] }> = {
  links: { end: 'jl', between: ['la', 'lb'] },
  'reports-a': { end: 'ja', between: ['ra', MIDDLE] },
  'reports-b': { end: 'jb', between: ['rb', MIDDLE] },
}
const COLLECTOR_PORT = 'host'

export const switchOf = ({ prefix }: LabPlan): string => `${prefix}-switch`
export const namespaceOf = ({ prefix }: LabPlan, node: string): string => `${prefix}-${node}`
export const hostInterface = ({ prefix }: LabPlan): string => `${prefix}h`
export const collectorAddress = ({ subnet }: LabPlan): string => `198.19.${subnet}.1`

export function nodesOf({ halves }: LabPlan): { node: string; half: Half; number: number }[] {
  return halves.flatMap((nodes, half) =>
    nodes.map((node, index) => ({
      node,
      half: half === 0 ? (0 as const) : (1 as const),
      number: 10 + index + (half === 0 ? 0 : halves[0].length),
    })),
  )
}

/** Where neighbours reach a node. */
export function linkAddress(plan: LabPlan, node: string): string {
  const found = nodesOf(plan).find((one) => one.node === node)
  if (!found) throw new Error(`There is no node "${node}".`)
  return `198.18.${plan.subnet}.${found.number}`
}

/** First the lines for the machine itself, then those for each namespace. */
export function buildLines(plan: LabPlan): { namespace: string | null; lines: string[] }[] {
  const inSwitch = switchOf(plan)
  const nodes = nodesOf(plan)
  const host = [
    ...[inSwitch, ...nodes.map(({ node }) => namespaceOf(plan, node))].map((name) => `netns add ${name}`),
    ...nodes.flatMap(({ node, number }) =>
      ['links', 'reports'].map(
        (name) =>
          `link add ${name} netns ${namespaceOf(plan, node)} type veth peer name ${name[0]}${number} netns ${inSwitch}`,
      ),
    ),
    `link add ${hostInterface(plan)} type veth peer name ${COLLECTOR_PORT} netns ${inSwitch}`,
    `addr add ${collectorAddress(plan)}/24 dev ${hostInterface(plan)}`,
    `link set ${hostInterface(plan)} up`,
  ]
  const bridges = [...LINK_BRIDGES, ...REPORT_BRIDGES, MIDDLE]
  const wiring = [
    ...bridges.flatMap((name) => [
      `link add ${name} type bridge forward_delay 0 mcast_snooping 0`,
      `link set ${name} up`,
    ]),
    ...Object.values(JOINTS).flatMap(({ end, between: [one, other] }) => [
      `link add ${end} type veth peer name ${end}x`,
      `link set ${end} master ${one} up`,
      `link set ${end}x master ${other} up`,
    ]),
    ...nodes.flatMap(({ half, number }) => [
      `link set l${number} master ${LINK_BRIDGES[half]} up`,
      `link set r${number} master ${REPORT_BRIDGES[half]} up`,
    ]),
    `link set ${COLLECTOR_PORT} up`,
  ]
  return [
    { namespace: null, lines: host },
    { namespace: inSwitch, lines: wiring },
    ...nodes.map(({ node, number }) => ({
      namespace: namespaceOf(plan, node),
      lines: [
        'link set lo up',
        `addr add 198.18.${plan.subnet}.${number}/24 dev links`,
        `addr add 198.19.${plan.subnet}.${number}/24 dev reports`,
        'link set links up',
        'link set reports up',
      ],
    })),
  ]
}

/** In the switch. */
export function collectorLine(place: CollectorPlace): string {
  return `link set ${COLLECTOR_PORT} master ${place === 'outside' ? MIDDLE : REPORT_BRIDGES[place]}`
}

/** In the switch. */
export function jointLine(joint: Joint, state: 'up' | 'down'): string {
  return `link set ${JOINTS[joint].end} ${state}`
}

/** With the namespaces go their bridges, and with either end of a cable the other. */
export function removalLines(plan: LabPlan): string[] {
  return [
    `link del ${hostInterface(plan)}`,
    ...[...nodesOf(plan).map(({ node }) => namespaceOf(plan, node)), switchOf(plan)].map(
      (name) => `netns del ${name}`,
    ),
  ]
}
