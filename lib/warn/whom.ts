/** From call orders, turns and roles to people, at one moment; from windows to what they cover. Pure. */
import type { RuleNow } from './advance'
import type { CallOrderNow, Recipient } from './incident-now'
import { sameRecipient } from './incident-now'
import { holderAt } from './turns'
import type { TeamPeople, WindowNow } from './watch-load'
import { isInWindow } from './window'

/** Who has left the team is told nothing. */
export function callOrdersAt(people: TeamPeople, atMs: number): Map<string, CallOrderNow> {
  const member = (userId: string | null): Recipient[] =>
    userId !== null && people.memberIds.includes(userId) ? [{ userId }] : []
  return new Map(
    people.callOrders.map(({ id, name, steps }) => [
      id,
      {
        id,
        name,
        steps: steps.map(({ afterMinutes, operators, turnIds, userIds, webhookIds }) => {
          const turns = people.turns.filter((turn) => turnIds.includes(turn.id))
          const to: Recipient[] = [
            ...turns.flatMap((turn) => member(holderAt(turn, turn.standIns, atMs))),
            ...userIds.flatMap(member),
            ...(operators ? people.operatorIds.flatMap(member) : []),
            ...webhookIds
              .filter((one) => people.webhookIds.includes(one))
              .map((webhookId) => ({ webhookId })),
          ]
          return {
            afterMinutes,
            to: to.filter((one, index) => to.findIndex((other) => sameRecipient(one, other)) === index),
          }
        }),
      },
    ]),
  )
}

/**
 * Rules that a maintenance window covers now, with its reason. One for a label covers what silence raises, and only
 * while all who are silent have the label: links may weaken for other reasons.
 */
export function coveredAt(
  rules: readonly Pick<RuleNow, 'id' | 'settings'>[],
  windows: readonly WindowNow[],
  { atMs, silent }: { atMs: number; silent: readonly Readonly<Record<string, string>>[] },
): Map<string, string> {
  const open = windows.filter((window) => isInWindow(window, atMs))
  const covered = new Map<string, string>()
  for (const { id, settings } of rules) {
    const isOfSilence = ['unheard', 'coverage', 'split'].includes(settings.kind)
    const window = open.find(
      ({ label }) =>
        label === null ||
        (isOfSilence && silent.length > 0 && silent.every((labels) => labels[label.key] === label.value)),
    )
    if (window) covered.set(id, window.reason)
  }
  return covered
}
