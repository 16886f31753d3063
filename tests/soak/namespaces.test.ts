import { afterAll, beforeAll } from 'vitest'
import { setup, teardown } from '@/tests/support/global-setup'
import { namespaceSuite } from '@/tests/support/namespaces/suite'

beforeAll(setup)
afterAll(teardown)

namespaceSuite({ pace: 'brisk', partsOutside: true, inside: ['Tarnwick', 'Eelholm'] })
