import { describe, expect, it } from 'vitest'
import { fieldsOf, ruleOfFields, startOf } from '@/lib/face/rule-fields'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { RULE_KINDS, ruleSchema } from '@/lib/warn/rule'

describe('the fields of a rule', () => {
  it.each(RULE_KINDS)('start as the default rule of the kind: %s', (kind) => {
    const { callOrderId, ...rule } = ruleOfFields(startOf(kind, 2), true)
    expect(callOrderId).toBeNull()
    expect(rule).toEqual(DEFAULT_RULES.find(({ settings }) => settings.kind === kind))
  })

  it('ask for a floor where nothing is known to be usual, and have none of their own', () => {
    const rule = ruleOfFields(fieldsOf(null, null), true)
    expect(rule.settings).toEqual({ kind: 'floor', floor: { of: 'value', lambda2: 0 } })
    expect(ruleSchema.safeParse(rule).success).toBe(false)
  })

  it.each(DEFAULT_RULES.map((rule) => [rule.settings.kind, rule] as const))(
    'give back the rule that they were made from: %s',
    (_kind, rule) => {
      const whole = { ...rule, callOrderId: '00000000-0000-4000-8000-000000000001' }
      expect(ruleOfFields(fieldsOf(whole, 2), true)).toEqual(whole)
    },
  )
})
