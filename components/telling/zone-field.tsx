'use client'

import { useId } from 'react'
import { TextField } from '@/components/ui'

export interface ZoneFieldProps {
  defaultValue: string | null
  error?: string
}

/** Any zone by its name; the reader's own where none is chosen yet. Shown in dialogs only, so never on the server. */
export function ZoneField({ defaultValue, error }: ZoneFieldProps) {
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
      />
      <datalist id={id}>
        {Intl.supportedValuesOf('timeZone').map((zone) => (
          <option key={zone} value={zone} />
        ))}
      </datalist>
    </>
  )
}
