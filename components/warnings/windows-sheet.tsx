'use client'

import Link from 'next/link'
import { useActionState, useMemo } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useNodes, useWindows } from '@/components/live/hooks'
import {
  Button,
  type Column,
  ConfirmDialog,
  DataTable,
  EmptyState,
  FailedState,
  Outcome,
  SelectField,
  Sheet,
  TextField,
  Time,
  useNow,
  Waiting,
  ZoneField,
} from '@/components/ui'
import type { MaintenanceWindowDto } from '@/lib/data/rules-dto'
import { labelChoices } from '@/lib/face/node-columns'
import { rehearseHref } from '@/lib/face/rehearsal'
import { type FormState, fieldError, fieldValue, IDLE, submit } from '@/lib/http/form-state'
import type { WarningActions } from './types'

const DAYS = ['Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat', 'Sun']
const REPEATS = [
  { value: '', label: 'once' },
  { value: '1,2,3,4,5,6,7', label: 'every day' },
  { value: '1,2,3,4,5', label: 'Monday to Friday' },
  ...DAYS.map((day, index) => ({ value: String(index + 1), label: `every ${day}` })),
]

/** When what is found is recorded and wakes nobody. */
export function WindowsSheet({ slug, actions }: { slug: string; actions: WarningActions | null }) {
  const windows = useWindows(slug)
  const columns = useMemo(
    () => [...COLUMNS, ...(actions ? [rehearseColumn(slug), endColumn(slug, actions, windows.retry)] : [])],
    [slug, actions, windows.retry],
  )
  return (
    <Sheet heading="Maintenance windows" aside="recorded, wakes nobody">
      <Freshness of={windows} />
      {windows.data ? (
        <div className="space-y-6">
          <DataTable
            caption="Maintenance windows"
            columns={columns}
            rows={windows.data}
            rowKey={({ id }) => id}
            stacks
            csvName={`${slug}-maintenance-windows`}
            empty={
              <EmptyState title="No maintenance is planned.">
                Before work that will raise warnings, make a window: nobody is woken in it.
              </EmptyState>
            }
          />
          {actions ? <WindowForm slug={slug} create={actions.createWindow} onDone={windows.retry} /> : null}
        </div>
      ) : windows.error ? (
        <FailedState quiet title="The windows could not be loaded." onRetry={windows.retry}>
          {windows.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the maintenance windows" className="h-32" />
      )}
    </Sheet>
  )
}

const COLUMNS: Column<MaintenanceWindowDto>[] = [
  { id: 'reason', header: 'what', words: true, value: ({ reason }) => reason },
  {
    id: 'of',
    header: 'of',
    value: ({ label }) => (label ? `${label.key}=${label.value}` : 'the whole overlay'),
  },
  { id: 'state', header: 'state', value: ({ state }) => state },
  {
    id: 'next',
    header: 'next',
    value: ({ next, startsAt }) => next[0]?.startsAt ?? startsAt,
    cell: ({ next, startsAt, endsAt }) =>
      (next.length > 0 ? next : [{ startsAt, endsAt }]).map((span) => (
        <span key={span.startsAt} className="block">
          <Time at={span.startsAt} show="moment" /> to <Time at={span.endsAt} show="moment" />
        </span>
      )),
  },
  {
    id: 'repeats',
    header: 'repeats',
    value: ({ repeats }) =>
      repeats
        ? `${repeats.weekdays.map((day) => DAYS[day - 1]).join(', ')}, ${repeats.zone}${repeats.until ? `, until ${repeats.until}` : ''}`
        : 'once',
  },
]

function rehearseColumn(slug: string): Column<MaintenanceWindowDto> {
  return {
    id: 'rehearse',
    header: 'rehearse',
    data: false,
    value: () => null,
    cell: ({ id, next, label }) =>
      next.length === 0 || label === null ? null : (
        <Link href={rehearseHref(slug, { window: id })} className="rule-link whitespace-nowrap">
          Rehearse this window
        </Link>
      ),
  }
}

function endColumn(slug: string, actions: WarningActions, onDone: () => void): Column<MaintenanceWindowDto> {
  return {
    id: 'end',
    header: 'end',
    data: false,
    value: () => null,
    cell: (window) =>
      window.next.length === 0 ? null : (
        <ConfirmDialog
          label="End"
          kind="quiet"
          title="End this maintenance window?"
          confirmLabel="End it"
          keepLabel="Leave it"
          onConfirm={async () => {
            const state = await submit(actions.endWindow, { slug, id: window.id })
            if (state.status === 'failed') return state.problem.detail
            onDone()
            return null
          }}
        >
          <p>{window.reason}: from now on people are told again, and it does not come back.</p>
        </ConfirmDialog>
      ),
  }
}

function WindowForm(props: { slug: string; create: WarningActions['createWindow']; onDone: () => void }) {
  const nodes = useNodes(props.slug)
  const now = useNow()
  const [state, send, busy] = useActionState<FormState<MaintenanceWindowDto>, FormData>(
    async (previous, form) => {
      const next = await props.create(previous, form)
      if (next.status === 'done') props.onDone()
      return next
    },
    IDLE,
  )
  // The reader's zone is not known before the browser has taken over.
  if (now === null) return null
  const was = (name: string, first: string) => fieldValue(state, name) ?? first
  const text = (name: string, label: string, first: string, more: object = {}) => (
    <TextField
      label={label}
      name={name}
      defaultValue={was(name, first)}
      error={fieldError(state, name)}
      className="w-52"
      {...more}
    />
  )
  const labels = labelChoices(nodes.data ?? []).map((pair) => ({ value: pair, label: pair }))
  return (
    <form action={send} className="space-y-4 border-t border-hairline pt-5">
      <h3 className="text-base">Plan maintenance</h3>
      <input type="hidden" name="slug" value={props.slug} />
      <div className="flex flex-wrap items-end gap-4">
        {text('reason', 'What is done', '', { maxLength: 300, required: true })}
        <SelectField
          label="Of"
          name="label"
          options={[{ value: '', label: 'the whole overlay' }, ...labels]}
          defaultValue={was('label', '')}
          className="min-w-52"
        />
        {text('date', 'Day', '', { type: 'date', required: true })}
        {text('time', 'Begins at', '22:00', { type: 'time', required: true })}
        {text('minutes', 'Lasts, minutes', '60', { inputMode: 'numeric' })}
        <ZoneField
          defaultValue={fieldValue(state, 'zone') ?? null}
          error={fieldError(state, 'zone')}
          className="w-72"
        />
        <SelectField
          label="Repeats"
          name="weekdays"
          options={REPEATS}
          defaultValue={was('weekdays', '')}
          className="min-w-44"
        />
        {text('until', 'Until (if it repeats)', '', { type: 'date' })}
      </div>
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      {state.status === 'done' ? (
        <Outcome ok>It is planned; the table above shows the next times.</Outcome>
      ) : null}
      <Button type="submit" busy={busy} busyLabel="Planning…">
        Plan it
      </Button>
    </form>
  )
}
