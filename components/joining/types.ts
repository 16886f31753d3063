import type { CreatedJoiningCode, JoiningCode } from '@/lib/data/dto'
import type { FormState } from '@/lib/http/form-state'

export type CreateCode = (
  previous: FormState<CreatedJoiningCode>,
  form: FormData,
) => Promise<FormState<CreatedJoiningCode>>

export type RevokeCode = (previous: FormState<JoiningCode>, form: FormData) => Promise<FormState<JoiningCode>>

/** Parts of the example program, as they stand in its files. */
export interface JoiningExample {
  folder: string
  parts: readonly { path: string; text: string }[]
  /** The program to start. */
  main: string
}
