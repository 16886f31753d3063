'use client'

import { useId, useState } from 'react'
import { Button, inputClass, SelectField, TextField, ZoneField } from '@/components/ui'
import type { Telling, Turn } from '@/lib/data/telling-dto'
import { hourText, WEEKDAYS } from '@/lib/face/telling'
import { type FormState, fieldError } from '@/lib/http/form-state'

export interface TurnFieldsProps {
  people: Telling['people']
  /** Null for a new one. */
  turn: Turn | null
  /** The day it is, for a new one. */
  today: string
  state: FormState<unknown>
}

export function TurnFields({ people, turn, today, state }: TurnFieldsProps) {
  return (
    <>
      <TextField
        label="Name"
        name="name"
        defaultValue={turn?.name}
        autoComplete="off"
        error={fieldError(state, 'name')}
      />
      <div className="flex flex-wrap gap-4">
        <SelectField
          label="Handed over on"
          name="handOverWeekday"
          defaultValue={String(turn?.handOverWeekday ?? 1)}
          options={WEEKDAYS.map((label, index) => ({ value: String(index + 1), label }))}
        />
        <SelectField
          label="at"
          name="handOverHour"
          defaultValue={String(turn?.handOverHour ?? 9)}
          options={Array.from({ length: 24 }, (_, hour) => ({ value: String(hour), label: hourText(hour) }))}
        />
      </div>
      <ZoneField defaultValue={turn?.zone ?? null} error={fieldError(state, 'zone')} />
      <TextField
        label="A day of the first person’s week"
        hint="That week begins with the hand-over on this day or the last one before it."
        name="startsOn"
        type="date"
        defaultValue={turn?.startsOn ?? today}
        error={fieldError(state, 'startsOn')}
      />
      <OrderOfPeople
        people={people}
        initial={turn?.people.map(({ id }) => id) ?? []}
        error={fieldError(state, 'userIds')}
      />
    </>
  )
}

function OrderOfPeople({
  people,
  initial,
  error,
}: {
  people: Telling['people']
  initial: string[]
  error?: string
}) {
  const [ids, setIds] = useState(initial)
  const id = useId()
  const nameOf = (one: string) => people.find((person) => person.id === one)?.name ?? ''
  const earlier = (index: number) =>
    setIds(ids.with(index - 1, ids[index] ?? '').with(index, ids[index - 1] ?? ''))
  const rest = people.filter((person) => !ids.includes(person.id))
  return (
    <fieldset className="max-w-xl">
      <legend className="mb-1 font-semibold">A week each, in this order</legend>
      <input type="hidden" name="userIds" value={ids.join(',')} />
      <ol className="border-t border-hairline">
        {ids.map((one, index) => (
          <li key={one} className="flex flex-wrap items-center gap-2 border-b border-hairline py-1">
            <span className="min-w-0 flex-1">
              {index + 1}. {nameOf(one)}
            </span>
            <Button
              kind="quiet"
              disabled={index === 0}
              onClick={() => earlier(index)}
              aria-label={`${nameOf(one)} earlier`}
            >
              Earlier
            </Button>
            <Button
              kind="quiet"
              onClick={() => setIds(ids.filter((other) => other !== one))}
              aria-label={`Take ${nameOf(one)} out`}
            >
              Take out
            </Button>
          </li>
        ))}
      </ol>
      {rest.length > 0 ? (
        <>
          <label htmlFor={id} className="mt-2 mb-1 block text-sm text-soft">
            Add a person
          </label>
          <select
            id={id}
            value=""
            onChange={(event) => setIds([...ids, event.target.value])}
            className={inputClass}
          >
            <option value="">choose…</option>
            {rest.map((person) => (
              <option key={person.id} value={person.id}>
                {person.name}
              </option>
            ))}
          </select>
        </>
      ) : null}
      {error ? <p className="mt-1.5 border-l-4 border-ink pl-2 text-sm font-semibold">{error}</p> : null}
    </fieldset>
  )
}
