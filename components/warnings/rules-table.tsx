'use client'

import { useMemo } from 'react'
import {
  Button,
  type Column,
  ConfirmDialog,
  DataTable,
  EmptyState,
  Mark,
  type MarkShape,
  Time,
} from '@/components/ui'
import type { WarningRuleDto } from '@/lib/data/rules-dto'
import { submit } from '@/lib/http/form-state'
import { timingText } from '@/lib/warn/rule-sentence'
import type { WarningActions } from './types'

export interface RulesTableProps {
  slug: string
  rules: readonly WarningRuleDto[]
  /** Null for those who may only look. */
  actions: WarningActions | null
  onEdit: (rule: WarningRuleDto) => void
  onDone: () => void
}

const SHAPES: Record<WarningRuleDto['state'], MarkShape> = {
  clear: 'hollow',
  rising: 'dashed',
  raised: 'full',
  clearing: 'full',
}

export function RulesTable({ slug, rules, actions, onEdit, onDone }: RulesTableProps) {
  const columns = useMemo(
    () => [...COLUMNS, ...(actions ? [actionColumn({ slug, actions, onEdit, onDone })] : [])],
    [slug, actions, onEdit, onDone],
  )
  return (
    <DataTable
      caption="Warning rules"
      columns={columns}
      rows={rules}
      rowKey={({ id }) => id}
      stacks
      csvName={`${slug}-warning-rules`}
      empty={
        <EmptyState title="No rule watches this overlay.">
          Add one; it can be tried on past readings before it is saved.
        </EmptyState>
      }
    />
  )
}

const COLUMNS: Column<WarningRuleDto>[] = [
  {
    id: 'rule',
    header: 'warns when',
    words: true,
    value: ({ sentence }) => sentence,
    cell: (rule) => (
      <>
        {rule.sentence}
        <span className="block text-sm text-soft">{timingText(rule.settings.kind, rule)}</span>
      </>
    ),
  },
  { id: 'severity', header: 'severity', value: ({ severity }) => severity },
  { id: 'told', header: 'told', value: ({ callOrder }) => callOrder?.name ?? 'nobody' },
  {
    id: 'state',
    header: 'state',
    value: ({ said }) => said,
    cell: (rule) => (
      <>
        <Mark shape={rule.isOn ? SHAPES[rule.state] : 'crossed'}>
          <span className="whitespace-normal">{rule.said}</span>
        </Mark>
        <span className="block text-sm text-soft">
          {rule.waitsFor ? `waits for ${rule.waitsFor}` : <Evaluated at={rule.evaluatedAt} />}
        </span>
      </>
    ),
  },
]

function Evaluated({ at }: { at: string | null }) {
  return at === null ? (
    'not evaluated yet'
  ) : (
    <>
      evaluated <Time at={at} />
    </>
  )
}

function actionColumn(props: {
  slug: string
  actions: WarningActions
  onEdit: (rule: WarningRuleDto) => void
  onDone: () => void
}): Column<WarningRuleDto> {
  const { slug, actions, onEdit, onDone } = props
  const turn = async (rule: WarningRuleDto) => {
    const change = JSON.stringify({ isOn: !rule.isOn })
    const state = await submit(actions.change, { slug, id: rule.id, rule: change })
    if (state.status === 'failed') return state.problem.detail
    onDone()
    return null
  }
  return {
    id: 'actions',
    header: 'change',
    data: false,
    value: () => null,
    cell: (rule) => (
      <div className="-ml-2 flex flex-wrap">
        <Button kind="quiet" onClick={() => onEdit(rule)}>
          Change
        </Button>
        <ConfirmDialog
          label={rule.isOn ? 'Turn off' : 'Turn on'}
          kind="quiet"
          title={rule.isOn ? 'Turn this rule off?' : 'Turn this rule on?'}
          confirmLabel={rule.isOn ? 'Turn it off' : 'Turn it on'}
          keepLabel="Leave it"
          onConfirm={() => turn(rule)}
        >
          <p>{rule.sentence}</p>
          <p>
            {rule.isOn
              ? 'Nobody is warned of it any more. What it has raised leaves its incident.'
              : 'It is evaluated from the next reading on.'}
          </p>
        </ConfirmDialog>
        <ConfirmDialog
          label="Remove"
          kind="quiet"
          title="Remove this rule?"
          confirmLabel="Remove the rule"
          onConfirm={async () => {
            const state = await submit(actions.remove, { slug, id: rule.id })
            if (state.status === 'failed') return state.problem.detail
            onDone()
            return null
          }}
        >
          <p>{rule.sentence}</p>
          <p>It goes for good, with its settings. What it has raised stays in the incidents’ timelines.</p>
        </ConfirmDialog>
      </div>
    ),
  }
}
