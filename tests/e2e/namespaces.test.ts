import { namespaceSuite } from '@/tests/support/namespaces/suite'

// `npm run soak -- namespaces` has the rest: parted with the collector outside of both halves, and inside of the other one.
namespaceSuite({ pace: 'brisk', partsOutside: false, inside: ['Tarnwick'] })
