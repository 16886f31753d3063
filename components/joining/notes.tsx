import { AGENT_RULES, NEIGHBOUR_SOURCES, networkNotes } from '@/lib/face/joining'
import { Lead, Terms, Typed } from './way'

export function NeighbourNotes() {
  return (
    <>
      <Lead>
        Add one of these to <Typed>enrol</Typed> or <Typed>run</Typed>. While the source fails the last good
        list stays in use, and the Nodes page says so.
      </Lead>
      <Terms
        terms={NEIGHBOUR_SOURCES.map(({ label, text, meaning }) => ({
          term: label,
          meaning: (
            <>
              <Typed>{text}</Typed>
              <span className="mt-0.5 block">{meaning}</span>
            </>
          ),
        }))}
      />
      <Lead>
        The overlay knows its nodes; an agent must be found beside each. Without a rule the items are agents’
        own addresses, <Typed>ws://…</Typed>:
      </Lead>
      <Terms terms={AGENT_RULES.map(({ text, meaning }) => ({ term: <Typed>{text}</Typed>, meaning }))} />
      <Lead>
        A neighbour beside which no agent is found counts as “without an agent”: it lowers the coverage on
        every page until there is one.
      </Lead>
    </>
  )
}

export function NetworkNotes({ origin }: { origin: string | null }) {
  if (origin === null) return null
  return <Terms terms={networkNotes(origin).map(({ what, text }) => ({ term: what, meaning: text }))} />
}
