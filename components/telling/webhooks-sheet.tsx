'use client'

import { useState } from 'react'
import {
  type Column,
  CommandBlock,
  ConfirmDialog,
  DataTable,
  EmptyState,
  Mark,
  Note,
  Outcome,
  Sheet,
  TextField,
  Time,
} from '@/components/ui'
import type { Webhook, WebhookSecret } from '@/lib/data/telling-dto'
import { fieldError, submit } from '@/lib/http/form-state'
import { ActButton, outcomeOf } from './act-button'
import { FormDialog } from './form-dialog'
import type { WebhookActions } from './types'

export interface WebhooksSheetProps {
  team: string
  webhooks: Webhook[]
  /** Null for those who may only look. */
  actions: WebhookActions | null
}

export function WebhooksSheet({ team, webhooks, actions }: WebhooksSheetProps) {
  const [made, setMade] = useState<WebhookSecret | null>(null)
  const columns = actions ? [...COLUMNS, actionsColumn(actions, setMade)] : COLUMNS
  return (
    <Sheet heading="Webhooks" aside="programs of the team’s">
      <div className="space-y-4">
        {made ? (
          <div className="max-w-2xl space-y-3">
            <Outcome ok>
              Give this secret to the receiver of “{made.name}”: each event is signed with it. It is not shown
              again.
            </Outcome>
            <CommandBlock label={`Secret of ${made.name}`} text={made.secret} />
          </div>
        ) : null}
        <DataTable
          caption="Webhooks"
          columns={columns}
          rows={webhooks}
          rowKey={(webhook) => webhook.id}
          stacks
          csvName={`${team}-webhooks`}
          empty={
            <EmptyState title="There is no webhook yet.">
              A webhook sends each event of an incident to a program of yours, signed as Standard Webhooks 1.0
              has it.
            </EmptyState>
          }
        />
        {actions ? (
          <FormDialog
            label="Add a webhook"
            title="Add a webhook"
            action={actions.addWebhookAction}
            submitLabel="Add it"
            onDone={setMade}
          >
            {(state) => (
              <>
                <input type="hidden" name="team" value={team} />
                <TextField label="Name" name="name" autoComplete="off" error={fieldError(state, 'name')} />
                <TextField
                  label="Address"
                  hint="Over http:// others on the way can read it."
                  name="url"
                  type="url"
                  placeholder="https://"
                  autoComplete="off"
                  error={fieldError(state, 'url')}
                />
              </>
            )}
          </FormDialog>
        ) : (
          <Note>Owners of the team add and change webhooks.</Note>
        )}
      </div>
    </Sheet>
  )
}

const COLUMNS: Column<Webhook>[] = [
  { id: 'name', header: 'name', value: (webhook) => webhook.name },
  {
    id: 'url',
    header: 'address',
    value: (webhook) => webhook.url,
    cell: (webhook) => <span className="font-figures text-sm wrap-anywhere">{webhook.url}</span>,
  },
  {
    id: 'state',
    header: 'state',
    value: (webhook) => (webhook.disabledAt ? 'off' : 'on'),
    cell: ({ disabledAt, disabledBecause, previousUntil }) => (
      <>
        <Mark shape={disabledAt ? 'hollow' : 'full'}>{disabledAt ? 'off' : 'on'}</Mark>
        {disabledAt ? (
          <span className="block text-sm">
            since <Time at={disabledAt} show="moment" />
            {disabledBecause ? `: ${disabledBecause}` : ''}
          </span>
        ) : null}
        {previousUntil ? (
          <span className="block text-sm text-soft">
            the secret before signs too until <Time at={previousUntil} show="moment" />
          </span>
        ) : null}
      </>
    ),
  },
  {
    id: 'added',
    header: 'added',
    value: (webhook) => webhook.createdAt,
    cell: (webhook) => <Time at={webhook.createdAt} show="moment" />,
  },
]

function actionsColumn(actions: WebhookActions, setMade: (made: WebhookSecret) => void): Column<Webhook> {
  const { rotateWebhookAction, enableWebhookAction, removeWebhookAction, testWebhookAction } = actions
  return {
    id: 'actions',
    header: 'Test, rotate and remove',
    data: false,
    value: () => null,
    cell: ({ id, name, disabledAt }) => (
      <div className="flex flex-wrap gap-2">
        <ActButton action={testWebhookAction} fields={{ id }} done="On its way: see the delivery log.">
          Send a test<span className="sr-only"> to {name}</span>
        </ActButton>
        {disabledAt ? (
          <ActButton action={enableWebhookAction} fields={{ id }} done="It is on.">
            Turn on<span className="sr-only"> {name}</span>
          </ActButton>
        ) : null}
        <ConfirmDialog
          label={
            <span>
              New secret<span className="sr-only"> for {name}</span>
            </span>
          }
          kind="quiet"
          title={`Make a new secret for “${name}”?`}
          confirmLabel="Make a new secret"
          onConfirm={async () => {
            const state = await submit(rotateWebhookAction, { id })
            if (state.status === 'done') setMade(state.value)
            return state.status === 'failed' ? state.problem.detail : null
          }}
        >
          <p>
            The secret in use signs beside the new one for 24 hours, then stops for good. One before it stops
            at once.
          </p>
        </ConfirmDialog>
        <ConfirmDialog
          label={
            <span>
              Remove<span className="sr-only"> {name}</span>
            </span>
          }
          kind="quiet"
          title={`Remove the webhook “${name}”?`}
          confirmLabel="Remove the webhook"
          onConfirm={() => outcomeOf(removeWebhookAction, { id })}
        >
          <p>
            Its secret goes, and what is waiting to be sent to it. It cannot go while a call order names it.
          </p>
        </ConfirmDialog>
      </div>
    ),
  }
}
