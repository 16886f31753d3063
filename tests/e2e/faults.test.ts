import { faultSuite } from '@/tests/support/faults/suite'

faultSuite({ faultMs: 3_000, stopsMs: [3_000] })
