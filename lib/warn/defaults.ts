import { CallOrderSchema, type WarningRule, WarningRuleSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { DEFAULT_CALL_ORDER } from './call-order'
import { CLEAR } from './hysteresis'
import type { Rule } from './rule'

/** Longer than a node takes to restart with its agent. Common practice of the trade; from memory. */
const RESTART_SECONDS = 180

/**
 * What watches an overlay from its first minute. Rules by what is usual say nothing until that is known; silence, a split
 * and few links need no usual.
 */
export const DEFAULT_RULES: readonly Omit<Rule, 'callOrderId'>[] = [
  {
    settings: { kind: 'split' },
    ...{ severity: 'urgent', onDelaySeconds: 45, clearMarginPercent: 0, offDelaySeconds: 300, isOn: true },
  },
  {
    settings: { kind: 'few-links', links: 2, smallerSidePercent: 10 },
    ...{
      severity: 'urgent',
      onDelaySeconds: RESTART_SECONDS,
      clearMarginPercent: 50,
      offDelaySeconds: 600,
      isOn: true,
    },
  },
  {
    settings: { kind: 'floor', floor: { of: 'usual', percent: 60 } },
    ...{ severity: 'warning', onDelaySeconds: 300, clearMarginPercent: 15, offDelaySeconds: 600, isOn: true },
  },
  {
    settings: {
      kind: 'falling',
      means: 'hour',
      windowHours: 24,
      floor: { of: 'usual', percent: 60 },
      withinHours: 12,
      probabilityPercent: 80,
    },
    ...{
      severity: 'warning',
      onDelaySeconds: 300,
      clearMarginPercent: 25,
      offDelaySeconds: 3600,
      isOn: true,
    },
  },
  {
    settings: { kind: 'unheard', agents: 2 },
    ...{ severity: 'warning', onDelaySeconds: 600, clearMarginPercent: 0, offDelaySeconds: 300, isOn: true },
  },
  {
    settings: { kind: 'coverage', percent: 90 },
    ...{ severity: 'note', onDelaySeconds: 900, clearMarginPercent: 5, offDelaySeconds: 600, isOn: true },
  },
  {
    settings: { kind: 'audit' },
    ...{ severity: 'warning', onDelaySeconds: 300, clearMarginPercent: 0, offDelaySeconds: 600, isOn: true },
  },
]

/** For a team that has none yet. @returns the id of the team's call order of that name */
export async function ensureDefaultCallOrder(em: EntityManager, teamId: string, now: Date): Promise<string> {
  const known = await em.findOne(CallOrderSchema, { team: teamId, name: DEFAULT_CALL_ORDER.name })
  if (known) return known.id
  const made = em.create(CallOrderSchema, { team: teamId, ...DEFAULT_CALL_ORDER, createdAt: now })
  await em.flush()
  return made.id
}

/** What watches a new overlay, told to all who may act. */
export async function createDefaultRules(
  em: EntityManager,
  { overlayId, teamId }: { overlayId: string; teamId: string },
  now: Date,
): Promise<void> {
  const callOrder = await ensureDefaultCallOrder(em, teamId, now)
  for (const rule of DEFAULT_RULES)
    await em.insert<WarningRule>(WarningRuleSchema, {
      ...rule,
      ...{ overlay: overlayId, team: teamId, callOrder, state: CLEAR, createdAt: now, changedAt: now },
    })
}
