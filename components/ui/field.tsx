import { type ComponentProps, type ReactNode, useId } from 'react'
import { cx } from '@/lib/face/cx'

export const inputClass =
  'block min-h-10 w-full border border-edge bg-sheet px-3 py-1.5 text-base text-ink placeholder:text-soft pointer-coarse:min-h-11 aria-invalid:border-2 aria-invalid:border-ink disabled:text-soft'

export interface FieldControl {
  id: string
  'aria-describedby': string | undefined
  'aria-invalid': true | undefined
}

export interface FieldProps {
  label: ReactNode
  /** What the value does, in plain words. */
  hint?: ReactNode
  /** What is wrong and how to put it right. */
  error?: ReactNode
  optional?: boolean
  className?: string
  children: (control: FieldControl) => ReactNode
}

/** A label, a hint, a control and its error, tied together for screen readers. */
export function Field({ label, hint, error, optional, className, children }: FieldProps) {
  const id = useId()
  const described = [hint ? `${id}-hint` : '', error ? `${id}-error` : ''].filter(Boolean).join(' ')
  return (
    <div className={cx('max-w-xl', className)}>
      <label htmlFor={id} className="mb-1 block font-semibold">
        {label}
        {optional ? <span className="font-normal text-soft"> (optional)</span> : null}
      </label>
      {hint ? (
        <p id={`${id}-hint`} className="mb-1.5 text-sm text-soft">
          {hint}
        </p>
      ) : null}
      {children({ id, 'aria-describedby': described || undefined, 'aria-invalid': error ? true : undefined })}
      {error ? (
        <p id={`${id}-error`} className="mt-1.5 border-l-4 border-ink pl-2 text-sm font-semibold">
          {error}
        </p>
      ) : null}
    </div>
  )
}

type Shared = Omit<FieldProps, 'children'>

export function TextField({
  label,
  hint,
  error,
  optional,
  className,
  ...input
}: Shared & Omit<ComponentProps<'input'>, 'children'>) {
  return (
    <Field {...{ label, hint, error, optional, className }}>
      {(control) => <input type="text" {...input} {...control} className={inputClass} />}
    </Field>
  )
}

export interface Option {
  value: string
  label: string
}

export function SelectField({
  label,
  hint,
  error,
  optional,
  className,
  options,
  ...select
}: Shared & Omit<ComponentProps<'select'>, 'children'> & { options: readonly Option[] }) {
  return (
    <Field {...{ label, hint, error, optional, className }}>
      {(control) => (
        <select {...select} {...control} className={inputClass}>
          {options.map((o) => (
            <option key={o.value} value={o.value}>
              {o.label}
            </option>
          ))}
        </select>
      )}
    </Field>
  )
}

export interface Choice extends Option {
  /** What choosing it means. */
  meaning: ReactNode
}

/** Radio buttons whose meaning is written out beside each. */
export function ChoiceField({
  legend,
  hint,
  error,
  choices,
  defaultValue,
  ...input
}: {
  legend: ReactNode
  hint?: ReactNode
  error?: string | null
  choices: readonly Choice[]
} & Omit<ComponentProps<'input'>, 'type' | 'value' | 'children'>) {
  return (
    <fieldset className="max-w-xl">
      <legend className="mb-1 font-semibold">{legend}</legend>
      {hint ? <p className="mb-1.5 text-sm text-soft">{hint}</p> : null}
      <div className="border border-edge bg-sheet">
        {choices.map((c) => (
          <label
            key={c.value}
            className="flex gap-3 border-b border-hairline px-3 py-2.5 last:border-b-0 has-checked:bg-paper"
          >
            <input
              {...input}
              type="radio"
              value={c.value}
              defaultChecked={c.value === defaultValue}
              className="mt-1 size-4 shrink-0 accent-(--ink)"
            />
            <span>
              <span className="block font-medium">{c.label}</span>
              <span className="block text-sm text-soft">{c.meaning}</span>
            </span>
          </label>
        ))}
      </div>
      {error ? <p className="mt-1.5 border-l-4 border-ink pl-2 text-sm font-semibold">{error}</p> : null}
    </fieldset>
  )
}
