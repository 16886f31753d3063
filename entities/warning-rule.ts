import { defineEntity, type InferEntity, p } from '@mikro-orm/core'
import type { RuleState } from '@/lib/warn/hysteresis'
import { type RuleSettings, SEVERITIES } from '@/lib/warn/rule'
import { CallOrderSchema } from './call-order'
import { OverlaySchema } from './overlay'
import { TeamSchema } from './team'

export const WarningRuleSchema = defineEntity({
  name: 'WarningRule',
  tableName: 'warning_rules',
  properties: {
    id: p.uuid().primary().defaultRaw('gen_random_uuid()'),
    overlay: () => p.manyToOne(OverlaySchema).ref(false),
    team: () => p.manyToOne(TeamSchema).ref(false),
    settings: p.json<RuleSettings>(),
    severity: p.enum([...SEVERITIES]),
    onDelaySeconds: p.integer(),
    clearMarginPercent: p.float().columnType('double precision'),
    offDelaySeconds: p.integer(),
    isOn: p.boolean(),
    callOrder: () => p.manyToOne(CallOrderSchema).ref(false).nullable(),
    state: p.json<RuleState>(),
    evaluatedAt: p.datetime().nullable(),
    createdAt: p.datetime(),
    changedAt: p.datetime(),
  },
})
export interface WarningRule extends InferEntity<typeof WarningRuleSchema> {}
