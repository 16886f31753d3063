import { People20261201 } from './migration-2026-12-01-people'
import { Overlays20261202 } from './migration-2026-12-02-overlays'
import { Readings20261203 } from './migration-2026-12-03-readings'
import { AgentProofs20261204 } from './migration-2026-12-04-agent-proofs'
import { LateArrivals20261205 } from './migration-2026-12-05-late-arrivals'
import { AgentsInService20261206 } from './migration-2026-12-06-agents-in-service'
import { ReadingsForYears20261207 } from './migration-2026-12-07-readings-for-years'
import { NodeSnapshots20261208 } from './migration-2026-12-08-node-snapshots'
import { PlainReports20261209 } from './migration-2026-12-09-plain-reports'
import { Warnings20261210 } from './migration-2026-12-10-warnings'
import { Rehearsals20261211 } from './migration-2026-12-11-rehearsals'
import { Reinforcement20261212 } from './migration-2026-12-12-reinforcement'
import { Sealed20261213 } from './migration-2026-12-13-sealed'
import { Partners20261214 } from './migration-2026-12-14-partners'

/** In order; a migration that has landed is never edited. */
export const migrations = [
  { name: '2026-12-01-people', class: People20261201 },
  { name: '2026-12-02-overlays', class: Overlays20261202 },
  { name: '2026-12-03-readings', class: Readings20261203 },
  { name: '2026-12-04-agent-proofs', class: AgentProofs20261204 },
  { name: '2026-12-05-late-arrivals', class: LateArrivals20261205 },
  { name: '2026-12-06-agents-in-service', class: AgentsInService20261206 },
  { name: '2026-12-07-readings-for-years', class: ReadingsForYears20261207 },
  { name: '2026-12-08-node-snapshots', class: NodeSnapshots20261208 },
  { name: '2026-12-09-plain-reports', class: PlainReports20261209 },
  { name: '2026-12-10-warnings', class: Warnings20261210 },
  { name: '2026-12-11-rehearsals', class: Rehearsals20261211 },
  { name: '2026-12-12-reinforcement', class: Reinforcement20261212 },
  { name: '2026-12-13-sealed', class: Sealed20261213 },
  { name: '2026-12-14-partners', class: Partners20261214 },
]
