import { afterAll, beforeAll } from 'vitest'
import { setup, teardown } from '@/tests/support/global-setup'
import { namespaceSuite } from '@/tests/support/namespaces/suite'

const HOOK_MS = 60_000

beforeAll(setup, HOOK_MS)
afterAll(teardown, HOOK_MS)

namespaceSuite({ pace: 'brisk', partsOutside: true, inside: ['Tarnwick', 'Eelholm'] })
