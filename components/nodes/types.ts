import type { OverlayNode } from '@/lib/data/dto'
import type { FormState } from '@/lib/http/form-state'

/** What an operator may do to one node. */
export type NodeAction = (previous: FormState<OverlayNode>, form: FormData) => Promise<FormState<OverlayNode>>

export interface NodeActions {
  retire: NodeAction
  revoke: NodeAction
  readmit: NodeAction
}
