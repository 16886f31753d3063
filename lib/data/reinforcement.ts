import type { Reading } from '@/lib/data/dto'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { type Advice, advise } from '@/lib/reinforce/advise'
import type { KnownOverlay } from '@/lib/reinforce/known'
import { exactSaid, firstOrderSaid, nothingSaid } from '@/lib/reinforce/words'
import { loadKnown } from './known-overlay'
import { openOverlay } from './overlays'
import { listPlanned } from './planned-links'
import { memoryOf, presentReading } from './readings'
import { headline, ofHeadline, reckonLinks } from './reckon-links'
import type { Proposal, Reinforcement, ReinforcementAsked } from './reinforcement-dto'
import { sightOf } from './sight'

export { markJoined, planLink, withdrawLink } from './planned-links'

/** Which new links would help most, as far as what is disclosed can tell. */
export async function getReinforcement(
  call: Call,
  slug: string,
  asked: ReinforcementAsked,
): Promise<Reinforcement> {
  const overlay = await openOverlay(call, 'reinforcement.read', slug)
  const sight = await sightOf(call, overlay)
  const reading = await presentReading(call.em, overlay, call.now, sight)
  const known = await loadKnown(call.em, overlay, await memoryOf(call.em, overlay.id), sight)
  const planned = await listPlanned(call.em, overlay.id, sight)
  const whole = { at: reading.at, planned, ...about(known) }
  if (!known) return { ...whole, ...nothing('no-reading'), lambda2: headline(reading) }
  const mayLink = choiceOf(known, asked)
  const advice = advise({
    known,
    disclosure: overlay.disclosure,
    reading: ofHeadline(reading),
    asked,
    mayLink,
  })
  return { ...whole, ...(await answer(advice, known, reading)) }
}

const about = (known: KnownOverlay | null) => ({
  weight: known?.meanWeight ?? 1,
  nodes: known?.nodes.length ?? 0,
  core: known?.isCore ?? false,
})

type Answer = Omit<Reinforcement, 'at' | 'planned' | 'weight' | 'nodes' | 'core'>

async function answer(advice: Advice, known: KnownOverlay, reading: Reading): Promise<Answer> {
  if (advice.kind === 'nothing') return { ...nothing(advice.nothing), lambda2: headline(reading) }
  if (advice.kind === 'first-order') {
    return {
      ...firstOrderSaid(advice, known),
      ...{ method: 'first-order', nothing: null, lambda2: advice.lambda2, ceiling: null },
      proposals: advice.links.map(({ a, b, lambda2AtMost, gainAtMost }) =>
        proposal(known, a, b, { lambda2: lambda2AtMost, gain: gainAtMost }),
      ),
    }
  }
  const plan = await reckonLinks(known, advice.init)
  let before = plan.lambda2
  return {
    ...exactSaid(plan, known),
    method: plan.links.length > 0 ? 'exact' : null,
    nothing: plan.links.length > 0 ? null : 'no-pair',
    lambda2: plan.lambda2,
    ceiling: plan.ceiling,
    proposals: plan.links.map(({ a, b, lambda2 }) => {
      const gain = Math.max(0, lambda2 - before)
      before = lambda2
      return proposal(known, a, b, { lambda2, gain })
    }),
  }
}

function nothing(reason: NonNullable<Reinforcement['nothing']>): Omit<Answer, 'lambda2'> {
  return { ...nothingSaid(reason), method: null, nothing: reason, ceiling: null, proposals: [] }
}

function proposal(known: KnownOverlay, a: number, b: number, figures: Omit<Proposal, 'a' | 'b'>): Proposal {
  const ends = [a, b].map((at) => {
    const { name, labels, side, degree } = known.nodes[at]!
    return { name, labels: { ...labels }, side, degree }
  })
  ends.sort((x, y) => (x.name < y.name ? -1 : 1))
  return { a: ends[0]!, b: ends[1]!, ...figures }
}

/** Which nodes may get a link; null for all. */
function choiceOf({ nodes }: KnownOverlay, { nodes: text, label }: ReinforcementAsked): boolean[] | null {
  const known = new Set(nodes.map(({ name }) => name))
  // Between commas a name may have spaces in it, as made-up ones do.
  const names = (text ?? '')
    .split(',')
    .flatMap((part) => (known.has(part.trim()) ? part.trim() : part.split(/\s+/)))
    .filter((name) => name !== '')
  const strange = names.filter((name) => !known.has(name))
  if (strange.length > 0)
    throw new AppError('invalid-input', 'Some of the nodes are not linked at present.', {
      errors: [{ path: 'nodes', message: `Not among the nodes: ${strange.slice(0, 5).join(', ')}.` }],
    })
  if (names.length === 0 && label === undefined) return null
  const wanted = new Set(names)
  const equals = label?.indexOf('=') ?? -1
  const [key, value] = [label?.slice(0, equals) ?? '', label?.slice(equals + 1)]
  return nodes.map(
    ({ name, labels }) =>
      (names.length === 0 || wanted.has(name)) && (label === undefined || labels[key] === value),
  )
}
