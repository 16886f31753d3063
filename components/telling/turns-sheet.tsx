'use client'

import { ConfirmDialog, EmptyState, Sheet } from '@/components/ui'
import type { Telling, Turn } from '@/lib/data/telling-dto'
import { hourText, momentIn, turnText, WEEKDAYS } from '@/lib/face/telling'
import { outcomeOf } from './act-button'
import { FormDialog } from './form-dialog'
import { StandIns } from './stand-ins'
import { TurnFields } from './turn-fields'
import type { TurnActions } from './types'

export interface TurnsSheetProps {
  telling: Telling
  /** The reader may change things. */
  changes: boolean
  actions: TurnActions
}

export function TurnsSheet({ telling, changes, actions }: TurnsSheetProps) {
  const { turns, people, team, at } = telling
  return (
    <Sheet heading="Turns" aside="a week each">
      <div className="space-y-6">
        {turns.length === 0 ? (
          <EmptyState title="There are no turns yet.">
            In a turn each person has it for a week; a call order tells whoever’s it is.
          </EmptyState>
        ) : null}
        {turns.map((turn) => (
          <OneTurn key={turn.id} turn={turn} telling={telling} changes={changes} actions={actions} />
        ))}
        {changes ? (
          <FormDialog
            label="Add a turn"
            title="Add a turn"
            action={actions.createTurnAction}
            submitLabel="Add it"
          >
            {(state) => (
              <>
                <input type="hidden" name="team" value={team.slug} />
                <TurnFields people={people} turn={null} today={at.slice(0, 10)} state={state} />
              </>
            )}
          </FormDialog>
        ) : null}
      </div>
    </Sheet>
  )
}

function OneTurn({ turn, telling, changes, actions }: TurnsSheetProps & { turn: Turn }) {
  const { id, name, zone, handOverWeekday, handOverHour, weeks } = turn
  return (
    <section aria-label={`Turn ${name}`} className="border-t border-hairline pt-4">
      <h3 className="text-base">{name}</h3>
      <p className="mt-1">{turnText(turn)}.</p>
      <p className="text-sm text-soft">
        Handed over on {WEEKDAYS[handOverWeekday - 1]} at {hourText(handOverHour)} by the clock of {zone}.
      </p>
      <ol aria-label={`The next weeks of ${name}`} className="mt-3 grid gap-x-8 sm:grid-cols-2">
        {weeks.map(({ startsAt, person }) => (
          <li key={startsAt} className="flex gap-3 border-t border-hairline py-1">
            <span className="w-36 shrink-0 font-figures text-sm leading-6">{momentIn(zone, startsAt)}</span>
            <span className="min-w-0">{person?.name ?? 'nobody'}</span>
          </li>
        ))}
      </ol>
      <StandIns turn={turn} people={telling.people} changes={changes} actions={actions} />
      {changes ? (
        <div className="mt-2 -ml-2 flex flex-wrap gap-2">
          <FormDialog
            label={
              <span>
                Change<span className="sr-only"> the turn {name}</span>
              </span>
            }
            kind="quiet"
            title={`Change the turn “${name}”`}
            action={actions.changeTurnAction}
            submitLabel="Save"
          >
            {(state) => (
              <>
                <input type="hidden" name="id" value={id} />
                <TurnFields people={telling.people} turn={turn} today={turn.startsOn} state={state} />
              </>
            )}
          </FormDialog>
          <ConfirmDialog
            label={
              <span>
                Remove<span className="sr-only"> the turn {name}</span>
              </span>
            }
            kind="quiet"
            title={`Remove the turn “${name}”?`}
            confirmLabel="Remove the turn"
            onConfirm={() => outcomeOf(actions.removeTurnAction, { id })}
          >
            <p>Its order and its stand-ins go for good. It cannot go while a call order names it.</p>
          </ConfirmDialog>
        </div>
      ) : null}
    </section>
  )
}
