import { EXIT } from '../exit-codes'
import { DEFAULT_CONFIG } from './options'

export const HELP = `thinspan-agent: the probe beside one node of an overlay

  thinspan-agent enrol --collector URL --code CODE --name NAME [--listen HOST:PORT] [--address ws://…]
                       [--label KEY=VALUE]… [--neighbour ws://…]… [--config FILE]
      Joins the overlay that the joining code belongs to and writes the configuration.
  thinspan-agent run [--listen HOST:PORT] [--neighbour ws://…]… [--config FILE]
      Measures and reports until it is stopped. Flags add to what is configured.
  thinspan-agent status [--config FILE]
      Prints what is configured and whether the collector knows this agent, as JSON.

  --listen     where neighbours may dial this agent; without it, it only dials
  --address    how neighbours reach it, where that is not ws://HOST:PORT of --listen
  --config     ${DEFAULT_CONFIG} unless given; holds the private key, readable by its owner alone

Every flag may come as a variable instead: THINSPAN_COLLECTOR, THINSPAN_CODE, THINSPAN_NAME, THINSPAN_LISTEN,
THINSPAN_ADDRESS, THINSPAN_CONFIG, THINSPAN_LABELS and THINSPAN_NEIGHBOURS (separated by commas), and
THINSPAN_LOG for the least level logged (debug, info, warn, error).

Exit status: ${EXIT.ok} done; ${EXIT.unexpected} fault of the program; ${EXIT.usage} wrong use; ${EXIT.config} no configuration; ${EXIT.refused} refused by the collector;
${EXIT.unreachable} collector not reached; ${EXIT.listen} cannot listen; ${EXIT.alreadyEnrolled} enrolled already.
`
