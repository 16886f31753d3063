import type { Rule } from './rule'

type DefaultRule = Omit<Rule, 'callOrderId'>
const floor = { of: 'usual', percent: 60 } as const

/** Rules that every overlay begins with. */
export const DEFAULT_RULES: readonly DefaultRule[] = [
  rule('warning', { kind: 'floor', floor }, { on: 300, off: 600, margin: 15 }),
  rule('warning', { kind: 'few-links', links: 2, smallerSidePercent: 10 }, { on: 300, off: 600, margin: 15 }),
  rule(
    'warning',
    { kind: 'falling', means: 'hour', windowHours: 24, floor, withinHours: 12, probabilityPercent: 80 },
    { on: 300, off: 3600, margin: 15 },
  ),
  rule(
    'warning',
    { kind: 'falling', means: 'minute', windowHours: 3, floor, withinHours: 2, probabilityPercent: 80 },
    { on: 300, off: 1800, margin: 15 },
  ),
  rule('urgent', { kind: 'split' }, { on: 45, off: 300, margin: 0 }),
  rule('warning', { kind: 'unheard', agents: 2 }, { on: 600, off: 600, margin: 0 }),
  rule('note', { kind: 'coverage', percent: 90 }, { on: 900, off: 900, margin: 5 }),
  rule('warning', { kind: 'audit' }, { on: 300, off: 600, margin: 0 }),
]

function rule(
  severity: Rule['severity'],
  settings: Rule['settings'],
  { on, off, margin }: { on: number; off: number; margin: number },
): DefaultRule {
  return {
    settings,
    severity,
    isOn: true,
    onDelaySeconds: on,
    offDelaySeconds: off,
    clearMarginPercent: margin,
  }
}
