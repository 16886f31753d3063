'use client'

import { useAgentFile } from '@/components/live/hooks'
import { FailedState, Fold, Note, Sheet, Waiting } from '@/components/ui'
import {
  byHandCommands,
  CODE_PLACEHOLDER,
  containerCommands,
  type JoiningInput,
  onlyThisMachine,
  ownNodeCommands,
  PLACEHOLDERS,
  serviceCommands,
  serviceUpgradeCommands,
  trialCommands,
  unattendedCommands,
} from '@/lib/face/joining'
import { Embedding } from './embedding'
import { NeighbourNotes, NetworkNotes } from './notes'
import type { JoiningExample } from './types'
import { useOrigin } from './use-origin'
import { CommandBlocks, Lead, Terms, Typed } from './way'

export interface WaysProps {
  /** Null where no code has just been made. */
  code: string | null
  nodeVersion: string
  example: JoiningExample
}

/** How an agent comes beside a node, with this page's own address and, when it was just made, the code. */
export function Ways({ code, nodeVersion, example }: WaysProps) {
  const origin = useOrigin()
  const file = useAgentFile()
  const input: JoiningInput = {
    origin: origin ?? 'https://…',
    code,
    file: file.data ?? null,
    nodeVersion,
  }
  return (
    <Sheet heading="An agent beside a node" aside={file.data ? `agent ${file.data.version}` : null}>
      <FileFacts file={file} />
      {origin && onlyThisMachine(origin) ? (
        <Note className="mb-5 max-w-3xl">
          {origin} reaches this server from this machine only. For agents elsewhere, open this page under the
          address they can reach, or put it in place of {origin}.
        </Note>
      ) : null}
      <Placeholders code={code} />
      <Fold open heading="One node, by hand" about="Download, verify, enrol, run. Needs Node.js 20 or later.">
        <CommandBlocks commands={byHandCommands(input)} />
        <Lead>
          Labels such as <Typed>--label harbour=Tarnwick</Typed> on enrol make the lanes of the drawing. Take
          the line with <Typed>--neighbour</Typed> out beside the first node. What{' '}
          <Typed>node thinspan-agent.mjs help</Typed> says is all there is to set.
        </Lead>
      </Fold>
      <Fold
        heading="A trial: three agents on one machine"
        about="An overlay with a reading in about a minute."
      >
        <Lead>
          The code must be good for three agents. They are linked in a ring of three; its exact λ₂ is 3. Run
          the last block when you are done, so that they are not missed.
        </Lead>
        <CommandBlocks commands={trialCommands(input)} />
      </Fold>
      <Fold
        heading="As a service, with systemd"
        about="Hardened, with readiness, a watchdog and limits on memory and CPU."
      >
        <CommandBlocks commands={serviceCommands(input)} />
        <Lead>
          It enrols by itself at its first start, as a user that exists only while it runs; its key lies in{' '}
          <Typed>/var/lib/thinspan-agent</Typed>. Where Node.js is elsewhere, put what{' '}
          <Typed>command -v node</Typed> says in place of <Typed>/usr/bin/node</Typed>. As it stands the agent
          cannot change its own file; this lets it take the versions that you offer:
        </Lead>
        <CommandBlocks commands={serviceUpgradeCommands()} />
      </Fold>
      <Fold heading="In a container, or without Node.js" about="An image that is checked as it is made.">
        <CommandBlocks commands={containerCommands(input)} />
        <Lead>
          Other engines take the same words in place of <Typed>podman</Typed>. The container uses the host’s
          network, so that what it measures is what the node has. It takes no upgrades by itself: make a new
          image. On a machine with neither Node.js nor containers, put Node.js into a folder of its own and
          type its path, <Typed>/opt/thinspan/node/bin/node</Typed>, where a command says <Typed>node</Typed>:
        </Lead>
        <CommandBlocks commands={ownNodeCommands(input)} />
      </Fold>
      <Fold
        heading="Hundreds of nodes, unattended"
        about="From configuration management: the same files everywhere, as often as you like."
      >
        <Lead>
          Lay down the agent’s file and the unit as above, then these in place of the settings there. One code
          serves the whole roll-out; make it for as many agents as there are nodes.
        </Lead>
        <CommandBlocks commands={unattendedCommands(input)} />
        <Lead>
          Take machine images before an agent has enrolled. A clone that carries another machine’s key is
          noticed as it reports: it is refused, and{' '}
          <em className="font-medium text-ink not-italic">Last hour</em> names the node. On the clone, remove
          the agent’s configuration (<Typed>/var/lib/thinspan-agent/agent.json</Typed> of the service), give
          it a name of its own and start it again: it enrols anew. The original goes on undisturbed.
        </Lead>
      </Fold>
      <Fold
        heading="Neighbours, from where the overlay knows them"
        about="A list, a file, a command, DNS, or the node itself."
      >
        <NeighbourNotes />
      </Fold>
      <Fold
        heading="Inside your own program"
        about="Embedding: frames ride on the overlay’s own connections, so the links measured are the links used."
      >
        <Embedding example={example} input={input} />
      </Fold>
      <Fold heading="Firewalls and proxies" about="Which ports, in which direction, and what must pass.">
        <NetworkNotes origin={origin} />
      </Fold>
    </Sheet>
  )
}

function FileFacts({ file }: { file: ReturnType<typeof useAgentFile> }) {
  if (file.data)
    return (
      <p className="mb-4 max-w-4xl text-soft">
        This server serves version <Typed>{file.data.version}</Typed>, {Math.round(file.data.bytes / 1000)}{' '}
        kB, with the SHA-256 <Typed>{file.data.sha256}</Typed>.
      </p>
    )
  if (!file.error) return <Waiting label="Loading the facts of the agent’s file" className="mb-4 h-12" />
  return (
    <div className="mb-5">
      <FailedState quiet title="The agent’s file is not to be had from this server." onRetry={file.retry}>
        {file.error.message} The commands below cannot verify it until then.
      </FailedState>
    </div>
  )
}

function Placeholders({ code }: { code: string | null }) {
  const shown = [...PLACEHOLDERS, ...(code ? [] : [CODE_PLACEHOLDER])]
  return (
    <div className="mb-4">
      <p className="mb-1 text-sm text-soft">To be filled in:</p>
      <Terms terms={shown.map(({ name, meaning }) => ({ term: <Typed>{name}</Typed>, meaning }))} />
    </div>
  )
}
