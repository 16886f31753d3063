import { EXIT } from '../exit-codes'
import { DEFAULT_CONFIG } from './options'

export const HELP = `thinspan-agent: the probe beside one node of an overlay

  thinspan-agent enrol --collector URL --code-file FILE [--name NAME] [--listen HOST:PORT] [flags]
      Joins the overlay that the joining code belongs to and writes the configuration. Enrolled already under the
      same name, it changes nothing and succeeds.
  thinspan-agent run [--enrol-if-needed] [flags]
      Measures and reports until it is stopped. Flags add to what is configured, or take its place for this run.
  thinspan-agent check [--json] [flags]
      Says what would go wrong before anything starts, a line each with the remedy. Changes nothing.
  thinspan-agent status [--json]
      Says how the agent fares: from its metrics port where it has one, from the configuration and the collector.
  thinspan-agent leave --yes [--reason TEXT]
      Takes the node out of the overlay for good and moves the configuration aside.
  thinspan-agent rotate-key
      Puts a new key in the place of the agent's. One that runs takes it over by itself.
  thinspan-agent version, thinspan-agent help (as --version and --help)

Joining
  --collector URL       the server, https://… or http://…
  --code-file FILE      the joining code's file, so that no process list shows it; or --code CODE
  --name NAME           the node's name in the overlay; the host's name unless given
  --label KEY=VALUE     may be repeated; --labels-file FILE has one a line
  --node WORD           how the overlay knows the node (host:port, name), for the directory
  --config FILE         ${DEFAULT_CONFIG} unless given; holds the private key, readable by its owner alone
Links
  --listen HOST:PORT    where neighbours may dial this agent; without it, it only dials
  --address ws://…      how neighbours reach it, where that is not the address of --listen
  --neighbour ws://…    an agent to link to; may be repeated
  --neighbours-from X   where the overlay's own neighbours are learnt from:
                          list:A,B  file:PATH  command:LINE  srv:_NAME._tcp.DOMAIN  http://…
  --neighbours-at PATH  where the addresses are in JSON, such as peers[].address
  --neighbours-every S  seconds between looks
  --agents-at RULE      how an agent's address follows from a neighbour's: as-given; a port (same host);
                        ws://{host}:7946/; directory (looked up in the overlay's list of agents)
  --ca FILE             PEM certificates of an authority of your own, trusted instead of the public ones
  --cert FILE --key FILE  certificate and key, to be dialed at wss://
Watching
  --metrics [HOST:]PORT   serves /metrics, /health and /status to this machine; --metrics-anywhere to others too
  --spool FILE          keeps what happens while the collector is away
  --upgrades            takes over versions that the overlay's operators offer

Every flag may come as a variable instead, such as THINSPAN_COLLECTOR or THINSPAN_NEIGHBOURS_FROM. What may be
repeated is separated by commas in THINSPAN_LABELS and THINSPAN_NEIGHBOURS; flags without a value are yes or no.
THINSPAN_LOG is the least level logged: debug, info, warn, error.

Exit status
  ${EXIT.ok} done                       ${EXIT.listen} cannot listen
  ${EXIT.unexpected} fault of the program       ${EXIT.alreadyEnrolled} enrolled already, as another
  ${EXIT.usage} wrong use                  ${EXIT.checkFailed} check found something wrong
  ${EXIT.config} no good configuration      ${EXIT.ended} the agent has left, was retired or revoked
  ${EXIT.refused} refused by the collector   ${EXIT.upgraded} replaced by an offered version: start it again
  ${EXIT.unreachable} collector not reached
`
