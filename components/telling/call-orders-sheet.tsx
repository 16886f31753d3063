'use client'

import { ConfirmDialog, EmptyState, Sheet } from '@/components/ui'
import type { CallOrder, Telling } from '@/lib/data/telling-dto'
import { formatCount } from '@/lib/face/format'
import { afterText, stepWho, withoutOrder } from '@/lib/face/telling'
import { outcomeOf } from './act-button'
import { CallOrderFields } from './call-order-fields'
import { FormDialog } from './form-dialog'
import type { CallOrderActions } from './types'

export interface CallOrdersSheetProps {
  telling: Telling
  /** The reader may change things. */
  changes: boolean
  actions: CallOrderActions
}

export function CallOrdersSheet({ telling, changes, actions }: CallOrdersSheetProps) {
  return (
    <Sheet heading="Call orders" aside="who first, and who next while nobody has it">
      <div className="space-y-6">
        {telling.callOrders.length === 0 ? (
          <EmptyState title="There is no call order yet.">
            A rule tells by a call order: without one, its incidents are recorded and nobody is told.
          </EmptyState>
        ) : null}
        {telling.callOrders.map((order) => (
          <OneOrder key={order.id} order={order} telling={telling} changes={changes} actions={actions} />
        ))}
        {changes ? (
          <FormDialog
            label="Add a call order"
            title="Add a call order"
            action={actions.createCallOrderAction}
            submitLabel="Add it"
          >
            {(state) => (
              <>
                <input type="hidden" name="team" value={telling.team.slug} />
                <CallOrderFields telling={telling} order={null} state={state} />
              </>
            )}
          </FormDialog>
        ) : null}
      </div>
    </Sheet>
  )
}

function OneOrder({ order, telling, changes, actions }: CallOrdersSheetProps & { order: CallOrder }) {
  const { id, name, steps, rules } = order
  return (
    <section aria-label={`Call order ${name}`} className="border-t border-hairline pt-4">
      <h3 className="text-base">{name}</h3>
      <p className="text-sm text-soft">
        {rules === 0
          ? 'No rule tells by it.'
          : `${formatCount(rules, 'rule')} ${rules === 1 ? 'tells' : 'tell'} by it.`}
      </p>
      <ol className="mt-2 space-y-1">
        {steps.map((step, index) => (
          <li key={index} className="sm:flex sm:gap-3">
            <span className="block w-48 shrink-0 text-sm leading-6 text-soft">{afterText(step, index)}</span>
            <span className="min-w-0">{stepWho(telling, step).join('; ')}</span>
          </li>
        ))}
      </ol>
      {changes ? (
        <div className="mt-2 -ml-2 flex flex-wrap gap-2">
          <FormDialog
            label={
              <span>
                Change<span className="sr-only"> the call order {name}</span>
              </span>
            }
            kind="quiet"
            title={`Change the call order “${name}”`}
            action={actions.changeCallOrderAction}
            submitLabel="Save"
          >
            {(state) => (
              <>
                <input type="hidden" name="id" value={id} />
                <CallOrderFields telling={telling} order={order} state={state} />
              </>
            )}
          </FormDialog>
          <ConfirmDialog
            label={
              <span>
                Remove<span className="sr-only"> the call order {name}</span>
              </span>
            }
            kind="quiet"
            title={`Remove the call order “${name}”?`}
            confirmLabel="Remove the call order"
            onConfirm={() => outcomeOf(actions.removeCallOrderAction, { id })}
          >
            <p>{withoutOrder(order)}</p>
          </ConfirmDialog>
        </div>
      ) : null}
    </section>
  )
}
