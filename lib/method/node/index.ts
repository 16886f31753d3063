export type { Link, LinkState } from './link'
export { type HostFacts, halfOf, type ReceiveOutcome, WalkNode } from './walk-node'
