import type { Problem } from '@/lib/data/dto'

/** What a form knows of its last submission. Safe to import in the browser. */
export type FormState<T> =
  | { status: 'idle' }
  | { status: 'done'; value: T }
  /** `values` is what was typed, to fill the form again; secrets are left out. */
  | { status: 'failed'; problem: Problem; values: Record<string, string> }

export const IDLE: FormState<never> = { status: 'idle' }

/** The message for one field, if the submission failed on it. */
export function fieldError(state: FormState<unknown>, name: string): string | undefined {
  if (state.status !== 'failed') return undefined
  return state.problem.errors?.find((error) => error.path === name)?.message
}

/** What was typed into one field, if the submission failed. */
export function fieldValue(state: FormState<unknown>, name: string): string | undefined {
  return state.status === 'failed' ? state.values[name] : undefined
}

/** Calls a form's action with these fields, from a button that is no form. */
export function submit<T>(
  action: (previous: FormState<T>, form: FormData) => Promise<FormState<T>>,
  fields: Record<string, string>,
): Promise<FormState<T>> {
  const form = new FormData()
  for (const [name, value] of Object.entries(fields)) form.set(name, value)
  return action(IDLE, form)
}
