'use client'

import { useMemo, useState } from 'react'
import {
  type Column,
  ConfirmDialog,
  DataTable,
  EmptyState,
  Mark,
  Note,
  SelectField,
  Sheet,
  TextField,
  Time,
  ZoneField,
} from '@/components/ui'
import type { Channel } from '@/lib/data/telling-dto'
import { CHANNEL_WORDS } from '@/lib/face/telling'
import { type FormState, fieldError } from '@/lib/http/form-state'
import { SEVERITIES, type Severity } from '@/lib/warn/rule'
import { ActButton, outcomeOf } from './act-button'
import { FormDialog } from './form-dialog'
import type { ChannelActions } from './types'

const LEAST_WORDS: Record<Severity, string> = {
  note: 'everything',
  warning: 'warnings and urgent ones',
  urgent: 'urgent ones only',
}

export function ChannelsSheet({ channels, actions }: { channels: Channel[]; actions: ChannelActions }) {
  const columns = useMemo(() => [...COLUMNS, actionsColumn(actions)], [actions])
  return (
    <Sheet heading="My channels" aside="yours alone, for all of your teams">
      <div className="space-y-4">
        <DataTable
          caption="My channels"
          columns={columns}
          rows={channels}
          rowKey={(channel) => channel.id}
          stacks
          empty={
            <EmptyState title="You cannot be reached yet.">
              Add an e-mail address or a telephone number: until then whatever a call order says, you hear
              nothing.
            </EmptyState>
          }
        />
        <FormDialog
          label="Add a channel"
          title="Add a channel"
          action={actions.addChannelAction}
          submitLabel="Add it"
        >
          {(state) => <NewChannel state={state} />}
        </FormDialog>
        <Note>Your team sees by what you can be reached, not the address or number.</Note>
      </div>
    </Sheet>
  )
}

function NewChannel({ state }: { state: FormState<unknown> }) {
  const [kind, setKind] = useState('email')
  return (
    <>
      <SelectField
        label="By"
        name="kind"
        value={kind}
        onChange={(event) => setKind(event.target.value)}
        options={[
          { value: 'email', label: 'e-mail' },
          { value: 'sms', label: 'SMS' },
        ]}
      />
      <TextField
        label={kind === 'email' ? 'E-mail address' : 'Telephone number'}
        hint={kind === 'email' ? undefined : 'With its country code, as +44 20 7946 0018.'}
        name="address"
        type={kind === 'email' ? 'email' : 'tel'}
        autoComplete={kind === 'email' ? 'email' : 'tel'}
        error={fieldError(state, 'address')}
      />
    </>
  )
}

const COLUMNS: Column<Channel>[] = [
  { id: 'kind', header: 'by', value: (channel) => CHANNEL_WORDS[channel.kind] },
  {
    id: 'address',
    header: 'to',
    value: (channel) => channel.address,
    cell: (channel) => <span className="wrap-anywhere">{channel.address}</span>,
  },
  { id: 'least', header: 'hears of', value: (channel) => LEAST_WORDS[channel.leastSeverity] },
  {
    id: 'quiet',
    header: 'quiet',
    value: (channel) => (channel.quiet ? `${channel.quiet.from}–${channel.quiet.to}` : 'never'),
    cell: ({ quiet, quietUntil }) =>
      quiet ? (
        <>
          {quiet.from}–{quiet.to} <span className="text-soft">({quiet.zone}), but for urgent ones</span>
          {quietUntil ? (
            <span className="block text-sm">
              Quiet now, until <Time at={quietUntil} show="moment" />.
            </span>
          ) : null}
        </>
      ) : (
        'never'
      ),
  },
  {
    id: 'state',
    header: 'state',
    value: (channel) => (channel.isOn ? 'on' : 'off'),
    cell: ({ isOn }) => <Mark shape={isOn ? 'full' : 'hollow'}>{isOn ? 'on' : 'off'}</Mark>,
  },
]

function actionsColumn(actions: ChannelActions): Column<Channel> {
  const { testChannelAction } = actions
  return {
    id: 'actions',
    header: 'Change, test and remove',
    data: false,
    value: () => null,
    cell: (channel) => (
      <div className="flex flex-wrap gap-2">
        <FormDialog
          label={<Named what="Change" address={channel.address} />}
          kind="quiet"
          title={channel.address}
          action={actions.changeChannelAction}
          submitLabel="Save"
        >
          {(state) => <ChannelFields channel={channel} state={state} />}
        </FormDialog>
        <ActButton
          action={testChannelAction}
          fields={{ id: channel.id }}
          done="On its way: see the delivery log."
        >
          <Named what="Send a test" address={channel.address} />
        </ActButton>
        <ConfirmDialog
          label={<Named what="Remove" address={channel.address} />}
          kind="quiet"
          title={`Remove ${channel.address}?`}
          confirmLabel="Remove the channel"
          onConfirm={() => outcomeOf(actions.removeChannelAction, { id: channel.id })}
        >
          <p>Nothing more is sent to it, and what is waiting to be sent goes with it.</p>
        </ConfirmDialog>
      </div>
    ),
  }
}

function Named({ what, address }: { what: string; address: string }) {
  return (
    <span>
      {what}
      <span className="sr-only"> {address}</span>
    </span>
  )
}

function ChannelFields({ channel, state }: { channel: Channel; state: FormState<unknown> }) {
  const [quiet, setQuiet] = useState(channel.quiet ? 'daily' : 'none')
  return (
    <>
      <input type="hidden" name="id" value={channel.id} />
      <SelectField
        label="This channel is"
        name="isOn"
        defaultValue={channel.isOn ? 'on' : 'off'}
        options={[
          { value: 'on', label: 'on' },
          { value: 'off', label: 'off: nothing is sent to it' },
        ]}
      />
      <SelectField
        label="It hears of"
        name="leastSeverity"
        defaultValue={channel.leastSeverity}
        options={SEVERITIES.map((value) => ({ value, label: LEAST_WORDS[value] }))}
      />
      <SelectField
        label="Quiet hours"
        hint="What is not urgent waits for their end."
        name="quiet"
        value={quiet}
        onChange={(event) => setQuiet(event.target.value)}
        options={[
          { value: 'none', label: 'none' },
          { value: 'daily', label: 'every day' },
        ]}
      />
      {quiet === 'daily' ? (
        <>
          <div className="flex flex-wrap gap-4">
            <TextField
              label="From"
              name="from"
              type="time"
              defaultValue={channel.quiet?.from ?? '22:00'}
              error={fieldError(state, 'quiet.from')}
            />
            <TextField
              label="To"
              name="to"
              type="time"
              defaultValue={channel.quiet?.to ?? '07:00'}
              error={fieldError(state, 'quiet.to')}
            />
          </div>
          <ZoneField defaultValue={channel.quiet?.zone ?? null} error={fieldError(state, 'quiet.zone')} />
        </>
      ) : null}
    </>
  )
}
