import type { Overlay, SigningKey, UpgradeOfferDto } from '@/lib/data/dto'
import type { FormState } from '@/lib/http/form-state'

type Action<T> = (previous: FormState<T>, form: FormData) => Promise<FormState<T>>

export type OfferAction = Action<UpgradeOfferDto>
export type RetireAfterAction = Action<Overlay>
export type RotateAction = Action<SigningKey>

export interface UpkeepActions {
  offer: OfferAction
  halt: OfferAction
  retireAfter: RetireAfterAction
  rotateKey: RotateAction
}
