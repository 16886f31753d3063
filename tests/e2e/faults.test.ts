import { faultSuite } from '@/tests/support/faults/suite'

// `npm run soak -- faults` has the same for a minute each, and the longer stops.
faultSuite({ faultMs: 2_000, stopsMs: [3_000] })
