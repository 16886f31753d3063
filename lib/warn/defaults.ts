import { CallOrderSchema, type WarningRule, WarningRuleSchema } from '@/entities'
import type { EntityManager } from '@/lib/db'
import { DEFAULT_CALL_ORDER } from './call-order'
import { DEFAULT_RULES } from './default-rules'
import { CLEAR } from './hysteresis'

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
