import { faultSuite } from '@/tests/support/faults/suite'

const MINUTE_MS = 60_000

faultSuite({ faultMs: MINUTE_MS, stopsMs: [3_000, 15_000, MINUTE_MS] })
