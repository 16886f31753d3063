import { afterAll, beforeAll, beforeEach } from 'vitest'
import type { PaceName } from '@/lib/method/pace'
import { seedOverlay } from './collector'
import { openTestTeam, type TestTeam } from './team'

export interface OverlayPerTest {
  /** One for the file. */
  readonly team: TestTeam
  /** A new one before each test. */
  readonly overlay: { id: string; slug: string }
  em(): ReturnType<TestTeam['database']['orm']['em']['fork']>
}

/** A team for the file this is called in, and a fresh overlay for each of its tests; at drill pace unless said otherwise. */
export function overlayPerTest(init: { pace?: PaceName } = {}): OverlayPerTest {
  let team: TestTeam
  let overlay: { id: string; slug: string }
  let count = 0
  beforeAll(async () => {
    team = await openTestTeam()
  })
  afterAll(() => team.close())
  beforeEach(async () => {
    overlay = await seedOverlay(team.database, team.teamId, { slug: `tides-${count++}`, ...init })
  })
  return {
    get team() {
      return team
    },
    get overlay() {
      return overlay
    },
    em: () => team.database.orm.em.fork(),
  }
}
