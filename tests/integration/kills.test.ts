import { killTests } from '../support/processes/kills'

killTests({ agents: 12, times: 1 })
