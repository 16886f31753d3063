'use client'

import { SelectField, TextField } from '@/components/ui'
import type { Telling, Turn } from '@/lib/data/telling-dto'
import { momentIn } from '@/lib/face/telling'
import { fieldError } from '@/lib/http/form-state'
import { ActButton } from './act-button'
import { FormDialog } from './form-dialog'
import type { TurnActions } from './types'

export interface StandInsProps {
  turn: Turn
  people: Telling['people']
  changes: boolean
  actions: TurnActions
}

export function StandIns({ turn, people, changes, actions }: StandInsProps) {
  const { id, name, zone, standIns } = turn
  return (
    <div className="mt-3">
      {standIns.length > 0 ? (
        <ul aria-label={`Stand-ins of ${name}`}>
          {standIns.map((one) => (
            <li key={one.id} className="flex flex-wrap items-center gap-x-3">
              <span>
                {one.person.name} stands in from {momentIn(zone, one.startsAt)} to{' '}
                {momentIn(zone, one.endsAt)}.
              </span>
              {changes ? (
                <ActButton action={actions.removeStandInAction} fields={{ id: one.id }} done="Removed.">
                  Remove<span className="sr-only"> {one.person.name} as stand-in</span>
                </ActButton>
              ) : null}
            </li>
          ))}
        </ul>
      ) : null}
      {changes ? (
        <FormDialog
          label={
            <span>
              Add a stand-in<span className="sr-only"> to {name}</span>
            </span>
          }
          title={`Stand in for the turn “${name}”`}
          action={actions.addStandInAction}
          submitLabel="Add the stand-in"
        >
          {(state) => (
            <>
              <input type="hidden" name="turnId" value={id} />
              <SelectField
                label="Who stands in"
                name="userId"
                options={[
                  { value: '', label: 'choose…' },
                  ...people.map((person) => ({ value: person.id, label: person.name })),
                ]}
                error={fieldError(state, 'userId')}
              />
              <TextField
                label="From"
                hint={`By the clock of ${zone}.`}
                name="from"
                type="datetime-local"
                error={fieldError(state, 'from')}
              />
              <TextField
                label="To"
                hint={`By the clock of ${zone}.`}
                name="to"
                type="datetime-local"
                error={fieldError(state, 'to')}
              />
            </>
          )}
        </FormDialog>
      ) : null}
    </div>
  )
}
