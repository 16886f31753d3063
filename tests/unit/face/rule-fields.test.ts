import { describe, expect, it } from 'vitest'
import { fieldProblems, fieldsOf, ruleOfFields, startOf, typedNumber } from '@/lib/face/rule-fields'
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

  it.each<[string, Partial<ReturnType<typeof startOf>>, ReturnType<typeof fieldProblems>]>([
    ['a floor of nothing', { floorOf: 'value', floorLambda2: 0 }, { floorLambda2: 'Give more than 0.' }],
    ['a share over all', { floorPercent: 120 }, { floorPercent: 'Give at most 100 %.' }],
    ['what is no number', { onMinutes: Number.NaN }, { onMinutes: 'Give a number.' }],
    [
      'less than all of it',
      { kind: 'coverage', coveragePercent: 0 },
      { coveragePercent: 'Give more than 0 %.' },
    ],
    ['half a link', { kind: 'few-links', links: 1.5 }, { links: 'Give a whole number.' }],
    [
      'two at once',
      { kind: 'falling', windowHours: 400, offMinutes: 2000 },
      { windowHours: 'Give at most 336 hours.', offMinutes: 'Give at most a day.' },
    ],
  ])('have what is wrong beside them: %s', (_, typed, problems) => {
    const parsed = ruleSchema.safeParse(ruleOfFields({ ...startOf('floor', 2), ...typed }, true))
    expect(fieldProblems(parsed.error?.issues ?? [])).toEqual(problems)
  })

  it.each([
    ['0,6', 0.6],
    [' 2.5 ', 2.5],
    ['', Number.NaN],
    ['ten', Number.NaN],
    [3, 3],
  ])('take figures as they are typed: %s', (typed, value) => {
    expect(typedNumber(typed)).toBe(value)
  })

  it.each(DEFAULT_RULES.map((rule) => [rule.settings.kind, rule] as const))(
    'give back the rule that they were made from: %s',
    (_kind, rule) => {
      const whole = { ...rule, callOrderId: '00000000-0000-4000-8000-000000000001' }
      expect(ruleOfFields(fieldsOf(whole, 2), true)).toEqual(whole)
    },
  )
})
