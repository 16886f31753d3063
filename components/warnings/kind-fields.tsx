'use client'

import type { UseFormRegister } from 'react-hook-form'
import { SelectField, TextField } from '@/components/ui'
import { type RuleFields, typedNumber } from '@/lib/face/rule-fields'

export interface KindFieldsProps {
  kind: RuleFields['kind']
  floorOf: RuleFields['floorOf']
  register: UseFormRegister<RuleFields>
  /** What is wrong with a field that has been filled in. */
  wrong: (name: keyof RuleFields) => string | undefined
}

export const numberOf = { setValueAs: typedNumber } as const

/** What each kind of rule asks for, with its units. */
export function KindFields({ kind, floorOf, register, wrong }: KindFieldsProps) {
  const figure = (name: Parameters<typeof register>[0], label: string) => (
    <TextField
      label={label}
      inputMode="decimal"
      {...register(name, numberOf)}
      error={wrong(name)}
      className="w-52"
    />
  )
  switch (kind) {
    case 'floor':
      return <FloorFields floorOf={floorOf} register={register} figure={figure} />
    case 'few-links':
      return (
        <>
          {figure('links', 'At most, links')}
          {figure('smallerSidePercent', 'Smaller side at least, %')}
        </>
      )
    case 'falling':
      return (
        <>
          <FloorFields floorOf={floorOf} register={register} figure={figure} />
          <SelectField
            label="Look at means of each"
            options={[
              { value: 'minute', label: 'minute' },
              { value: 'hour', label: 'hour' },
            ]}
            {...register('means')}
            className="min-w-40"
          />
          {figure('windowHours', 'Look back, hours')}
          {figure('withinHours', 'Floor within, hours')}
          {figure('probabilityPercent', 'With a probability of, %')}
        </>
      )
    case 'unheard':
      return figure('agents', 'At least, agents')
    case 'coverage':
      return figure('coveragePercent', 'Less than, %')
    default:
      return null
  }
}

function FloorFields(props: {
  floorOf: RuleFields['floorOf']
  register: UseFormRegister<RuleFields>
  figure: (name: 'floorPercent' | 'floorLambda2', label: string) => React.ReactNode
}) {
  const { floorOf, register, figure } = props
  return (
    <>
      <SelectField
        label="The floor is"
        options={[
          { value: 'usual', label: 'a share of the usual' },
          { value: 'value', label: 'a value' },
        ]}
        {...register('floorOf')}
        className="min-w-52"
      />
      {floorOf === 'usual' ? figure('floorPercent', '% of the usual') : figure('floorLambda2', 'Value, λ₂')}
    </>
  )
}
