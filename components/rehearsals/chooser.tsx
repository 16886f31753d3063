'use client'

import { useMemo } from 'react'
import { Fold, Mark, SideMark } from '@/components/ui'
import type { OverlayLink, OverlayNode } from '@/lib/data/dto'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import { formatCount, formatLink, formatShare } from '@/lib/face/format'
import { labelChoices, labelText } from '@/lib/face/node-columns'
import {
  type ChooseFrom,
  joinedOf,
  labelId,
  linkId,
  type SoonWindow,
  takableOf,
  toggleLabel,
  toggleLink,
  toggleNode,
  withBetween,
  withNodes,
} from '@/lib/face/rehearsal'
import { PairFields } from './pair-fields'
import { PasteNames } from './paste-names'
import { type Pick, PickList } from './pick-list'
import { SoonWindows } from './soon-windows'

export interface ChooserProps {
  slug: string
  from: ChooseFrom
  windows: readonly SoonWindow[]
  exclude: Excluded
  onChange: (change: (exclude: Excluded) => Excluded) => void
  onWindows: (change: (exclude: Excluded) => Excluded, reason: string) => void
}

/** Every way to say what is to be away; they add up. */
export function Chooser({ slug, from, windows, exclude, onChange, onWindows }: ChooserProps) {
  const joined = useMemo(() => joinedOf(from.nodes), [from.nodes])
  const own = useMemo(() => takableOf(from.nodes), [from.nodes])
  const nodePicks = useMemo(() => own.map(nodePick), [own])
  const labelPicks = useMemo(() => labelPicksOf(own), [own])
  const linkPicks = useMemo(() => {
    const names = new Set(own.map(({ name }) => name))
    return from.links
      .filter(({ state, a, b }) => state === 'live' && names.has(a) && names.has(b))
      .map(linkPick)
  }, [from.links, own])
  const soon = windows.length
  const others = joined.length - own.length
  return (
    <div>
      {others > 0 ? (
        <p className="mb-3 text-soft">
          {formatCount(others, 'node of another team stays', 'nodes of other teams stay')}: each team
          rehearses with its own.
        </p>
      ) : null}
      <Fold
        heading="All that reboot tonight"
        about={
          soon === 0
            ? 'no maintenance window begins within 24 hours'
            : `${formatCount(soon, 'maintenance window begins', 'maintenance windows begin')} within 24 hours`
        }
        open={soon > 0}
      >
        <SoonWindows slug={slug} windows={windows} onTake={onWindows} />
      </Fold>
      <Fold heading="By label" about={takenText(exclude.labels.length, 'label')} open>
        <PickList
          legend="Labels whose nodes are taken away"
          search={labelPicks.length > 12 ? 'Find a label' : undefined}
          items={labelPicks}
          isChosen={(id) => exclude.labels.some((label) => labelId(label) === id)}
          onToggle={(id) => onChange((was) => toggleLabel(was, labelOf(id)))}
          empty="No label tells nodes apart here, or too many do: take nodes by name."
        />
      </Fold>
      <Fold heading="By name" about={takenText(exclude.nodes.length, 'node')} open>
        <PickList
          legend="Nodes that are taken away"
          search="Find by name or key=value"
          items={nodePicks}
          isChosen={(id) => exclude.nodes.includes(id)}
          onToggle={(id) => onChange((was) => toggleNode(was, id))}
          onAll={(ids) => onChange((was) => withNodes(was, ids))}
          empty="No node has joined yet."
        />
        <PasteNames nodes={own} onNames={(names) => onChange((was) => withNodes(was, names))} />
      </Fold>
      <Fold heading="Links" about={takenText(exclude.links.length + exclude.between.length, 'choice')}>
        {from.disclosure === 'named' ? (
          <>
            <PickList
              legend="Links that are taken away"
              search="Find a link by a name of its ends"
              items={linkPicks}
              isChosen={(id) => exclude.links.some((link) => linkId(link) === id)}
              onToggle={(id) => onChange((was) => toggleLink(was, linkOf(id)))}
              empty="No link is measured yet."
            />
            <PairFields nodes={own} onAdd={(pair) => onChange((was) => withBetween(was, pair))} />
          </>
        ) : (
          <p className="max-w-2xl text-soft">
            This overlay is {from.disclosure}: without a link the walkers would tell whether it is there, so
            links and pairs of labels are rehearsed in named overlays only. Nodes and labels can be rehearsed
            all the same.
          </p>
        )}
      </Fold>
    </div>
  )
}

const takenText = (count: number, noun: string): string | undefined =>
  count > 0 ? `${formatCount(count, noun)} taken` : undefined

function nodePick({ name, labels, side, state }: OverlayNode): Pick {
  const about = labelText(labels)
  return {
    id: name,
    label: <span className="font-medium">{name}</span>,
    detail: (
      <span className="flex flex-wrap items-center gap-x-3">
        {about}
        {state === 'heard' ? null : <Mark shape="dashed">{state}</Mark>}
        {side ? <SideMark side={side}>{side}</SideMark> : null}
      </span>
    ),
    text: `${name} ${about} ${state} ${side ? `side ${side}` : ''}`,
  }
}

function labelPicksOf(nodes: readonly OverlayNode[]): Pick[] {
  return labelChoices(nodes).map((pair) => {
    const { key, value } = labelOf(pair)
    const count = nodes.filter(({ labels }) => labels[key] === value).length
    return {
      id: pair,
      label: (
        <>
          <span className="text-soft">{key}</span> {value}
        </>
      ),
      detail: formatCount(count, 'node'),
      text: pair,
    }
  })
}

function linkPick({ a, b, weight, share, crossing }: OverlayLink): Pick {
  return {
    id: linkId([a, b]),
    label: formatLink(a, b),
    detail: [
      ...(crossing
        ? [`crosses the cut${share === null ? '' : `, ${formatShare(share)} of the reading`}`]
        : []),
      `weight ${weight.toFixed(2)}`,
    ].join(' · '),
    text: `${a} ${b} ${crossing ? 'crossing' : ''}`,
  }
}

/** Keys have no equals sign. */
function labelOf(id: string): { key: string; value: string } {
  const at = id.indexOf('=')
  return { key: id.slice(0, at), value: id.slice(at + 1) }
}

function linkOf(id: string): [string, string] {
  const [a = '', b = ''] = id.split('\n')
  return [a, b]
}
