'use client'

import { useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useReinforcement } from '@/components/live/hooks'
import { FailedState, Lambda, Note, PageHeading, Sheet, TitleBlock, Waiting } from '@/components/ui'
import { type Role, roleReaches } from '@/lib/auth/permissions'
import type { Reinforcement as Found } from '@/lib/data/reinforcement-dto'
import { formatCount, formatHigh, formatReading } from '@/lib/face/format'
import { forecastText, limitsQuery, NO_LIMITS } from '@/lib/face/reinforcement'
import { LimitsForm } from './limits-form'
import { PlannedSheet } from './planned-sheet'
import { ProposalsSheet } from './proposals-sheet'
import { ProposedDrawing } from './proposed-drawing'
import type { ReinforcementActions } from './types'

export interface ReinforcementProps {
  slug: string
  role: Role
  actions: ReinforcementActions
}

/** Which new links would help most, what is planned, and what came of it. */
export function Reinforcement({ slug, role, actions }: ReinforcementProps) {
  const may = roleReaches(role, 'operator')
  const [limits, setLimits] = useState(NO_LIMITS)
  const found = useReinforcement(slug, limitsQuery(limits))
  const acts = may ? actions : null
  return (
    <>
      {found.data ? (
        <Head found={found.data} />
      ) : (
        <PageHeading title="Reinforcement">Which new links would help most.</PageHeading>
      )}
      <div className="space-y-5">
        <Freshness of={found} />
        {found.data ? <ProposedDrawing slug={slug} found={found.data} /> : null}
        <Sheet heading="Links that would help" aside={found.data ? aboutText(found.data) : null}>
          <div className="space-y-5">
            <LimitsForm
              slug={slug}
              onAsk={setLimits}
              problem={found.error && !found.error.retry ? found.error.message : null}
            />
            {found.data ? (
              <ProposalsSheet slug={slug} found={found.data} plan={acts?.plan ?? null} onDone={found.retry} />
            ) : found.error ? (
              <FailedState quiet title="Nothing could be worked out." onRetry={found.retry}>
                {found.error.message}
              </FailedState>
            ) : (
              <Waiting label="Working out which links would help" className="h-64" />
            )}
          </div>
        </Sheet>
        {found.data ? (
          <PlannedSheet slug={slug} planned={found.data.planned} actions={acts} onDone={found.retry} />
        ) : null}
      </div>
    </>
  )
}

function Head({ found }: { found: Found }) {
  const { sentence, detail, lambda2, ceiling, method, proposals, weight, nodes, core } = found
  const last = proposals.at(-1)
  return (
    <div className="mb-6 grid gap-x-12 gap-y-6 lg:grid-cols-[minmax(0,1fr)_minmax(20rem,27rem)]">
      <div>
        <h1
          aria-live="polite"
          className="max-w-3xl text-pretty text-[1.75rem] leading-[1.15] tracking-tight break-words sm:text-[2.2rem]"
        >
          {sentence}
        </h1>
        <p className="mt-4 max-w-2xl text-lg text-soft">{detail}</p>
        <Note className="mt-4 max-w-2xl">
          It counts links between nodes, not the cables, power or hosts that they share. Two links over one
          cable hold no more than one.
        </Note>
      </div>
      <TitleBlock
        label="Figures of the proposal"
        figures={[
          {
            id: 'now',
            main: true,
            label: (
              <>
                <Lambda n={2} /> now
              </>
            ),
            value: lambda2 === null ? '–' : formatReading(lambda2),
            remark: method === 'exact' ? 'exact, of the links named' : 'the reading',
          },
          {
            id: 'then',
            label: `with ${formatCount(proposals.length, 'new link')}`,
            value: last ? forecastText(method, last.lambda2) : '–',
            remark: last ? (method === 'exact' ? 'exact' : 'an upper bound') : 'nothing to propose',
          },
          {
            id: 'ceiling',
            label: 'however chosen',
            value: ceiling === null ? '–' : `≤ ${formatHigh(ceiling)}`,
            remark: ceiling === null ? 'not known' : 'no links of that number give more',
          },
          {
            id: 'weight',
            label: 'weight of a new link',
            value: weight.toFixed(2),
            remark: 'as links have now',
          },
          {
            id: 'nodes',
            label: 'about',
            value: formatCount(nodes, 'node'),
            remark: core ? 'without loose ends' : 'all that are heard and linked',
          },
        ]}
      />
    </div>
  )
}

function aboutText({ method }: Found): string | null {
  if (method === null) return null
  return method === 'exact' ? 'chosen one after the other, exactly' : 'by the nodes’ values, first order'
}
