'use client'

import { useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useRules } from '@/components/live/hooks'
import { Button, FailedState, Note, PageHeading, Sheet, Time, Waiting } from '@/components/ui'
import { type Role, roleReaches } from '@/lib/auth/permissions'
import type { UsualState, WarningRuleDto } from '@/lib/data/rules-dto'
import { RuleForm } from './rule-form'
import { RulesTable } from './rules-table'
import type { WarningActions } from './types'
import { WindowsSheet } from './windows-sheet'

export interface WarningsProps {
  slug: string
  role: Role
  actions: WarningActions
}

/** What people are warned of, tried on history before it is saved; and when nobody is woken. */
export function Warnings({ slug, role, actions }: WarningsProps) {
  const may = roleReaches(role, 'operator')
  const rules = useRules(slug)
  const [editing, setEditing] = useState<WarningRuleDto | 'new' | null>(null)
  return (
    <>
      <PageHeading title="Warnings">{rules.data?.sentence ?? 'What people are warned of.'}</PageHeading>
      <div className="space-y-5">
        <Sheet heading="Rules" aside={rules.data ? 'evaluated with each reading' : null}>
          <Freshness of={rules} />
          {rules.data ? (
            <div className="space-y-4">
              <Usual usual={rules.data.usual} />
              <RulesTable
                slug={slug}
                rules={rules.data.items}
                actions={may ? actions : null}
                onEdit={setEditing}
                onDone={rules.retry}
              />
              {may && editing === null ? <Button onClick={() => setEditing('new')}>Add a rule</Button> : null}
            </div>
          ) : rules.error ? (
            <FailedState quiet title="The rules could not be loaded." onRetry={rules.retry}>
              {rules.error.message}
            </FailedState>
          ) : (
            <Waiting label="Loading the rules" className="h-64" />
          )}
        </Sheet>
        {rules.data && editing !== null ? (
          <RuleForm
            key={editing === 'new' ? 'new' : editing.id}
            slug={slug}
            rule={editing === 'new' ? null : editing}
            usual={rules.data.usual}
            callOrders={rules.data.callOrders}
            actions={actions}
            onClose={() => setEditing(null)}
            onDone={() => {
              setEditing(null)
              rules.retry()
            }}
          />
        ) : null}
        <WindowsSheet slug={slug} actions={may ? actions : null} />
        <Note className="max-w-4xl">
          A warning is never the only safeguard where an outage can hurt people: it needs this server, the
          agents and whatever carries messages to be alive, and links that all go at once cannot be foreseen.
          Local rules and qualified staff come first.
        </Note>
      </div>
    </>
  )
}

function Usual({ usual }: { usual: UsualState }) {
  if (usual.lambda2 !== null) return null
  return (
    <Note className="max-w-3xl">
      What is usual here is not known yet: it takes seven days of readings.{' '}
      {usual.knownFrom ? (
        <>
          It is known from <Time at={usual.knownFrom} show="moment" /> on.
        </>
      ) : (
        'They begin with the first fresh reading that is kept.'
      )}{' '}
      Until then rules by the usual say nothing. If you know what is usual, give the floor as a value
      meanwhile.
    </Note>
  )
}
