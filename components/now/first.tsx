import { LinkButton, Note } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import type { Overlay, Reading } from '@/lib/data/dto'
import { firstReadingSeconds } from '@/lib/face/expect'
import { formatCount } from '@/lib/face/format'
import { TitleFigures } from './title-figures'

/** No agent has joined: how to begin. */
export function FirstSteps({ overlay }: { overlay: Overlay }) {
  const may = roleReaches(overlay.role, 'operator')
  const seconds = firstReadingSeconds(overlay.pace)
  return (
    <div className="max-w-3xl">
      <h1 className="text-[2rem] leading-[1.1] tracking-tight sm:text-[2.6rem]">
        No agents have joined yet.
      </h1>
      <p className="mt-4 text-lg text-soft">
        A reading needs an agent beside each node of the overlay, and each agent the addresses of its
        neighbours.
      </p>
      <ol className="mt-6 border border-ink bg-sheet">
        {[
          ['Create a joining code', 'It says how many agents may use it, and for how long.'],
          [
            'Enrol an agent beside each node',
            'One command with the code; the agent makes a key of its own and keeps it.',
          ],
          [
            'Run the agents with their neighbours',
            `The first reading comes ${seconds.low} to ${seconds.high} s after the links stand.`,
          ],
        ].map(([title, text], i) => (
          <li key={title} className="flex gap-4 border-t border-hairline px-4 py-3 first:border-t-0">
            <span className="font-figures text-xl" aria-hidden="true">
              {i + 1}
            </span>
            <span>
              <span className="block font-semibold">{title}</span>
              <span className="text-soft">{text}</span>
            </span>
          </li>
        ))}
      </ol>
      <div className="mt-5">
        {may ? (
          <LinkButton kind="main" href={`/overlays/${overlay.slug}/joining`}>
            Create a joining code
          </LinkButton>
        ) : (
          <Note>Joining codes are made by operators and owners of {overlay.team.name}. Ask one of them.</Note>
        )}
      </div>
    </div>
  )
}

/** Agents are there, a reading is not. */
export function FirstReading({ overlay, reading }: { overlay: Overlay; reading: Reading | null }) {
  const seconds = firstReadingSeconds(overlay.pace)
  const joined = Math.max(overlay.joined, reading?.coverage.joined ?? 0)
  return (
    <div className="grid gap-x-12 gap-y-6 lg:grid-cols-[minmax(0,1fr)_minmax(20rem,27rem)]">
      <div className="max-w-2xl">
        <h1 aria-live="polite" className="text-[2rem] leading-[1.1] tracking-tight sm:text-[2.6rem]">
          {reading?.verdict || `${formatCount(joined, 'agent has', 'agents have')} joined; no reading yet.`}
        </h1>
        <p className="mt-4 text-lg text-soft">
          {reading?.detail ||
            `From the moment enough agents are heard and their links stand, the first reading takes about ${seconds.low} to ${seconds.high} s at ${overlay.pace} pace.`}
        </p>
        <p className="mt-4 text-soft">
          If it takes longer: see on the <em className="not-italic font-medium text-ink">Nodes</em> page which
          agents are heard and how many links each has.
        </p>
        <div className="mt-5 flex flex-wrap gap-2.5">
          <LinkButton href={`/overlays/${overlay.slug}/nodes`}>Look at the nodes</LinkButton>
          {roleReaches(overlay.role, 'operator') ? (
            <LinkButton href={`/overlays/${overlay.slug}/joining`}>Add agents</LinkButton>
          ) : null}
        </div>
      </div>
      {reading ? <TitleFigures reading={reading} /> : null}
    </div>
  )
}
