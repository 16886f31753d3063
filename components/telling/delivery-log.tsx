'use client'

import { useMemo } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useDeliveries } from '@/components/live/hooks'
import {
  type Column,
  ConfirmDialog,
  DataTable,
  EmptyState,
  FailedState,
  Mark,
  type MarkShape,
  Note,
  Sheet,
  Time,
  Waiting,
} from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import type { Delivery } from '@/lib/data/delivery-dto'
import { deliveriesSentence, deliveryState, deliveryTo, deliveryWhat } from '@/lib/face/deliveries'
import { type FormState, submit } from '@/lib/http/form-state'

export type RetryAction = (
  previous: FormState<{ id: string }>,
  form: FormData,
) => Promise<FormState<{ id: string }>>

export interface DeliveryLogProps {
  /** The short name of a team; the caller's first where left out. */
  team?: string
  /** The id of an incident, for its messages only. */
  incident?: string
  retry: RetryAction
}

/** What was sent to whom, each attempt and its answer. */
export function DeliveryLog({ team, incident, retry }: DeliveryLogProps) {
  const deliveries = useDeliveries({ team, incident })
  const may = deliveries.data ? roleReaches(deliveries.data.role, 'operator') : false
  const { retry: onDone } = deliveries
  const columns = useMemo(
    () => (may ? [...COLUMNS, retryColumn(retry, onDone)] : COLUMNS),
    [may, retry, onDone],
  )
  if (!deliveries.data)
    return (
      <Sheet heading="What was sent">
        {deliveries.error ? (
          <FailedState quiet title="The delivery log could not be loaded." onRetry={deliveries.retry}>
            {deliveries.error.message}
          </FailedState>
        ) : (
          <Waiting label="Loading the delivery log" className="h-64" />
        )}
      </Sheet>
    )
  return (
    <Sheet heading="What was sent" aside="newest first">
      <Freshness of={deliveries} />
      <p className="mb-3 max-w-2xl">{deliveriesSentence(deliveries.data.items)}</p>
      <DataTable
        caption="Messages and their attempts"
        columns={columns}
        rows={deliveries.data.items}
        rowKey={(delivery) => delivery.id}
        stacks
        search="Search what was sent"
        csvName="thinspan-deliveries"
        initialSort={{ id: 'written', descending: true }}
        empty={
          <EmptyState title="Nothing has been sent yet.">
            Add a channel and press its test button: the test shows up here, with what the other side
            answered.
          </EmptyState>
        }
      />
      <Note className="mt-4">
        “Sent” means that the mail server, the SMS service or the program took it. Whether a person has read
        it, only “I have it” tells.
      </Note>
    </Sheet>
  )
}

const SHAPES: Record<Delivery['state'], MarkShape> = {
  waiting: 'hollow',
  sending: 'hollow',
  sent: 'full',
  failed: 'short',
  dropped: 'short',
}

const COLUMNS: Column<Delivery>[] = [
  {
    id: 'written',
    header: 'written',
    value: (d) => d.writtenAt,
    cell: (d) => <Time at={d.writtenAt} show="moment" />,
  },
  { id: 'what', header: 'what', words: true, value: deliveryWhat },
  { id: 'to', header: 'to', value: deliveryTo },
  {
    id: 'state',
    header: 'state',
    value: deliveryState,
    cell: (d) => (
      <>
        <Mark shape={SHAPES[d.state]}>{deliveryState(d)}</Mark>
        {d.dueAt ? (
          <span className="block text-sm text-soft">
            next try <Time at={d.dueAt} show="both" />
          </span>
        ) : null}
      </>
    ),
  },
  {
    id: 'answer',
    header: 'answer',
    words: true,
    value: (d) => d.attempts.at(-1)?.answer ?? null,
    cell: (d) => <Attempts of={d} />,
  },
]

function Attempts({ of: { attempts } }: { of: Delivery }) {
  const last = attempts.at(-1)
  if (!last) return <span className="text-soft">not tried yet</span>
  return (
    <div className="break-words">
      {last.answer ?? 'no answer yet'}
      {attempts.length > 1 ? (
        <details>
          <summary className="text-sm">{attempts.length} attempts</summary>
          <ol className="space-y-1 text-sm">
            {attempts.map((attempt) => (
              <li key={attempt.number}>
                <Time at={attempt.startedAt} show="moment" />: {attempt.answer ?? 'under way'}
              </li>
            ))}
          </ol>
        </details>
      ) : null}
    </div>
  )
}

function retryColumn(retry: RetryAction, onDone: () => void): Column<Delivery> {
  return {
    id: 'retry',
    header: 'send again',
    data: false,
    value: () => null,
    cell: (delivery) =>
      delivery.state !== 'failed' && delivery.state !== 'dropped' ? null : (
        <ConfirmDialog
          label="Send again"
          kind="quiet"
          title={`Send this to ${deliveryTo(delivery)} again?`}
          confirmLabel="Send again"
          keepLabel="Leave it"
          onConfirm={async () => {
            const state = await submit(retry, { id: delivery.id })
            if (state.status === 'failed') return state.problem.detail
            onDone()
            return null
          }}
        >
          <p>
            It says what was so when it was written, {deliveryWhat(delivery)}, and goes behind whatever waits
            for the same receiver.
          </p>
        </ConfirmDialog>
      ),
  }
}
