import { killTests } from '../support/processes/kills'

killTests({ agents: 40, times: Number(process.env.THINSPAN_SOAK_KILLS ?? 15) })
