import { AGENT_PORT, type Command } from './types'

/** Where an agent learns its neighbours, as flags of enrol and run. */
export const NEIGHBOUR_SOURCES: readonly (Command & { meaning: string })[] = [
  {
    id: 'list',
    label: 'a list',
    text: '--neighbours-from list:gul-04:4000,pin-02:4000',
    meaning: 'Does not change while the agent runs.',
  },
  {
    id: 'file',
    label: 'a file',
    text: '--neighbours-from file:/var/lib/store/peers',
    meaning: 'One a line, or JSON. It is watched: a change counts at once.',
  },
  {
    id: 'command',
    label: 'a command',
    text: "--neighbours-from 'command:/usr/bin/store peers' --neighbours-every 30",
    meaning: 'What it prints: one a line, or JSON.',
  },
  {
    id: 'srv',
    label: 'DNS',
    text: '--neighbours-from srv:_store._tcp.harbourline.example',
    meaning: 'SRV records of that name.',
  },
  {
    id: 'http',
    label: 'the node itself',
    text: "--neighbours-from http://127.0.0.1:8080/peers --neighbours-at 'peers[].address'",
    meaning:
      'JSON over HTTP. Where an item also says quality (0 to 1) or up (true or false), that is the node’s own view of the link and lowers its weight.',
  },
]

/** From a node's address to its agent's. */
export const AGENT_RULES: readonly { text: string; meaning: string }[] = [
  { text: `--agents-at ${AGENT_PORT}`, meaning: 'on the same host, at that port' },
  { text: `--agents-at 'wss://{host}:${AGENT_PORT}/'`, meaning: 'by a pattern; {port} is there as well' },
  {
    text: '--agents-at directory',
    meaning:
      'looked up in the overlay’s list of agents by name or --node; it is fetched whole, so that asking reveals nothing',
  },
]
