import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { RULE_KINDS, type Rule, type RuleKind, type RuleSettings, type Severity } from '@/lib/warn/rule'

/** A rule as a form has it: every kind's fields side by side, delays in minutes. */
export interface RuleFields {
  kind: RuleKind
  floorOf: 'usual' | 'value'
  floorPercent: number
  floorLambda2: number
  links: number
  smallerSidePercent: number
  means: 'minute' | 'hour'
  windowHours: number
  withinHours: number
  probabilityPercent: number
  agents: number
  coveragePercent: number
  severity: Severity
  onMinutes: number
  clearMarginPercent: number
  offMinutes: number
  callOrderId: string
}

export const KIND_CHOICES: readonly { value: RuleKind; label: string }[] = [
  { value: 'floor', label: 'The reading is under a floor' },
  { value: 'few-links', label: 'Few links are left' },
  { value: 'falling', label: 'The reading falls towards a floor' },
  { value: 'split', label: 'Split, or to be treated as split' },
  { value: 'unheard', label: 'Agents are unheard' },
  { value: 'coverage', label: 'Too little is covered' },
  { value: 'audit', label: 'Figures contradict each other' },
]

/** As the default rule of the kind has it, with every other kind's fields beside it. */
export function startOf(kind: RuleKind, usual: number | null): RuleFields {
  const rule = DEFAULT_RULES.find(({ settings }) => settings.kind === kind)
  // There is one of every kind; a test says so.
  if (!rule) throw new Error(`There is no default rule of the kind ${kind}.`)
  return {
    ...EVERY_KIND,
    ...ofRule({ ...rule, callOrderId: null }),
    kind,
    floorOf: usual === null ? 'value' : 'usual',
  }
}

/** A floor by value has no default: nobody but the operator knows one. */
const EVERY_KIND: RuleFields = Object.assign(
  { floorLambda2: 0 },
  // The second falling rule, by minutes, is the more special one.
  ...[...DEFAULT_RULES].reverse().map((rule) => ofRule({ ...rule, callOrderId: null })),
)

/** @param usual what is usual; a new rule is by a value while it is not known */
export function fieldsOf(rule: Rule | null, usual: number | null): RuleFields {
  return rule ? { ...EVERY_KIND, ...ofRule(rule) } : startOf(RULE_KINDS[0], usual)
}

function ofRule(rule: Rule): Partial<RuleFields> {
  return {
    ...ofSettings(rule.settings),
    severity: rule.severity,
    onMinutes: rule.onDelaySeconds / 60,
    clearMarginPercent: rule.clearMarginPercent,
    offMinutes: rule.offDelaySeconds / 60,
    callOrderId: rule.callOrderId ?? '',
  }
}

function ofSettings(settings: RuleSettings): Partial<RuleFields> {
  const { kind } = settings
  switch (settings.kind) {
    case 'floor':
      return { kind, ...ofFloor(settings.floor) }
    case 'falling':
      return { ...settings, ...ofFloor(settings.floor) }
    case 'coverage':
      return { kind, coveragePercent: settings.percent }
    default:
      return settings
  }
}

function ofFloor(floor: Extract<RuleSettings, { kind: 'floor' }>['floor']): Partial<RuleFields> {
  return floor.of === 'usual'
    ? { floorOf: 'usual', floorPercent: floor.percent }
    : { floorOf: 'value', floorLambda2: floor.lambda2 }
}

export function ruleOfFields(fields: RuleFields, isOn: boolean): Rule {
  const { severity, onMinutes, offMinutes, clearMarginPercent, callOrderId } = fields
  return {
    settings: settingsOf(fields),
    severity,
    onDelaySeconds: Math.round(onMinutes * 60),
    clearMarginPercent,
    offDelaySeconds: Math.round(offMinutes * 60),
    isOn,
    callOrderId: callOrderId || null,
  }
}

function settingsOf(fields: RuleFields): RuleSettings {
  const { kind, links, smallerSidePercent, agents, coveragePercent } = fields
  const floor =
    fields.floorOf === 'usual'
      ? { of: 'usual' as const, percent: fields.floorPercent }
      : { of: 'value' as const, lambda2: fields.floorLambda2 }
  switch (kind) {
    case 'floor':
      return { kind, floor }
    case 'few-links':
      return { kind, links, smallerSidePercent }
    case 'falling': {
      const { means, windowHours, withinHours, probabilityPercent } = fields
      return { kind, means, windowHours, floor, withinHours, probabilityPercent }
    }
    case 'unheard':
      return { kind, agents }
    case 'coverage':
      return { kind, percent: coveragePercent }
    default:
      return { kind }
  }
}

/** A figure as it was typed, with a decimal point or comma; NaN for what is none. */
export function typedNumber(typed: unknown): number {
  const text = String(typed ?? '').trim()
  return text === '' ? Number.NaN : Number(text.replace(',', '.'))
}

/** Fields by the last part of the path under which the rule's schema names them. */
const FIELD_OF: Readonly<Record<string, keyof RuleFields>> = {
  lambda2: 'floorLambda2',
  links: 'links',
  smallerSidePercent: 'smallerSidePercent',
  windowHours: 'windowHours',
  withinHours: 'withinHours',
  probabilityPercent: 'probabilityPercent',
  agents: 'agents',
  onDelaySeconds: 'onMinutes',
  offDelaySeconds: 'offMinutes',
  clearMarginPercent: 'clearMarginPercent',
}

/** What is wrong with which field. @param issues of the rule's schema */
export function fieldProblems(
  issues: readonly { path: readonly PropertyKey[]; message: string }[],
): Partial<Record<keyof RuleFields, string>> {
  return Object.fromEntries(
    issues.map(({ path, message }) => {
      const last = String(path[path.length - 1])
      const ofPercent = path.includes('floor') ? 'floorPercent' : 'coveragePercent'
      return [last === 'percent' ? ofPercent : (FIELD_OF[last] ?? last), message]
    }),
  )
}
