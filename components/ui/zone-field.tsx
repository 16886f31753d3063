'use client'

import { useId } from 'react'
import { TextField } from './field'

export interface ZoneFieldProps {
  defaultValue: string | null
  error?: string
  className?: string
}

/** Any zone by its name; the reader's own where none is chosen yet. Never rendered on the server, which does not know the reader's. */
export function ZoneField({ defaultValue, error, className }: ZoneFieldProps) {
  const id = useId()
  return (
    <>
      <TextField
        label="Time zone"
        hint="By name, as Europe/London: its changes of clocks are followed."
        name="zone"
        list={id}
        autoComplete="off"
        defaultValue={defaultValue ?? Intl.DateTimeFormat().resolvedOptions().timeZone}
        error={error}
        className={className}
      />
      <datalist id={id}>
        {Intl.supportedValuesOf('timeZone').map((zone) => (
          <option key={zone} value={zone} />
        ))}
      </datalist>
    </>
  )
}
