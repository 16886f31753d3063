import { describe, expect, it } from 'vitest'
import type { Change, RuleNow } from '@/lib/warn/advance'
import type { WarnFacts } from '@/lib/warn/facts'
import type { CallOrderNow, IncidentNow } from '@/lib/warn/incident-now'
import { type PlanInput, planIncident, RESOLVES_AFTER_MS } from '@/lib/warn/plan'

const T0 = Date.parse('2026-12-01T02:00:00Z')
const MINUTE_MS = 60_000
const iso = (atMs: number) => new Date(atMs).toISOString()

const facts: WarnFacts = {
  ...{
    atMs: T0,
    isFresh: true,
    lambda2: 0.4,
    usual: 2,
    level: 'weak',
    treatAsSplit: false,
    crossingLinks: 2,
  },
  ...{
    smallerSide: 9,
    joined: 36,
    heard: 36,
    linksKnown: 112,
    linksMeasured: 112,
    check: 'agrees',
    leftOut: 0,
  },
}
const few: RuleNow = {
  ...{ id: 'few', settings: { kind: 'few-links', links: 2, smallerSidePercent: 10 }, severity: 'warning' },
  ...{ onDelaySeconds: 0, clearMarginPercent: 0, offDelaySeconds: 0, isOn: true, callOrderId: 'order' },
  ...{ state: { is: 'clear' }, evaluatedAtMs: null },
}
const split: RuleNow = { ...few, id: 'split', settings: { kind: 'split' }, severity: 'urgent' }
const raises = (rule: RuleNow, over: Partial<WarnFacts> = {}): Change => ({
  ...{ rule, transition: 'raised', facts: { ...facts, ...over }, fall: null },
})
const clears = (rule: RuleNow, atMs: number): Change => ({
  ...{ rule, transition: 'cleared', facts: { ...facts, atMs, crossingLinks: 6 }, fall: null },
})
const order: CallOrderNow = {
  ...{ id: 'order', name: 'Nights' },
  steps: [
    { afterMinutes: 0, to: [{ userId: 'quill' }] },
    { afterMinutes: 10, to: [{ userId: 'ferrier' }, { webhookId: 'pager' }] },
  ],
}
const open: IncidentNow = {
  ...{ id: 'i', severity: 'warning', sentence: 'Few links left: 2 links hold 9 nodes to the other 27.' },
  ...{ raisedAtMs: T0, clearedAtMs: null, isHeld: false, mutedUntilMs: null, inMaintenance: false },
  ...{ ruleIds: ['few'], told: { order: { step: 0, at: iso(T0) } } },
}
const plan = (over: Partial<PlanInput>) =>
  planIncident({
    ...{ atMs: T0, rules: [few, split], changes: [], incident: null, covered: new Map(), newId: () => 'i' },
    ...{ callOrders: new Map([['order', order]]), ...over },
  })

describe('an incident', () => {
  it('begins with the first rule that is raised, and the first step is told', () => {
    expect(plan({ changes: [raises(few)] })).toEqual({
      isNew: true,
      incident: { ...open, resolvedAtMs: null },
      entries: [
        { atMs: T0, kind: 'raised', text: 'Few links left: 2 links hold 9 nodes to the other 27.' },
        { atMs: T0, kind: 'told', text: 'Step 1 of the call order "Nights" is told.' },
      ],
      tell: [
        {
          ...{ kind: 'raised', to: [{ userId: 'quill' }] },
          because: 'You are the first to be told by the call order "Nights".',
        },
      ],
    })
  })

  it('is joined by what is raised next, and those who were told hear where it is graver', () => {
    const atMs = T0 + MINUTE_MS
    const changes = [raises(split, { atMs, treatAsSplit: true, heard: 27 })]
    expect(plan({ atMs, changes, incident: open })).toEqual({
      isNew: false,
      incident: {
        ...{ ...open, severity: 'urgent', ruleIds: ['few', 'split'], resolvedAtMs: null },
        sentence: 'Treat as split: 9 of 36 agents fell silent together.',
        told: { order: { step: 0, at: iso(atMs) } },
      },
      entries: [{ atMs, kind: 'joined', text: 'Treat as split: 9 of 36 agents fell silent together.' }],
      tell: [{ kind: 'graver', to: 'told', because: 'It has become graver.' }],
    })
  })

  it('goes to the next step once nobody has had it for so long, and not before', () => {
    const early = plan({ atMs: T0 + 10 * MINUTE_MS - 1, incident: open })
    expect(early.tell).toEqual([])
    const { tell, incident, entries } = plan({ atMs: T0 + 10 * MINUTE_MS, incident: open })
    expect(tell).toEqual([
      {
        ...{ kind: 'next', to: [{ userId: 'ferrier' }, { webhookId: 'pager' }] },
        because: 'Nobody has taken it for 10 min: you are next in the call order "Nights".',
      },
    ])
    expect(incident?.told).toEqual({ order: { step: 1, at: iso(T0 + 10 * MINUTE_MS) } })
    expect(entries.map(({ text }) => text)).toEqual([
      'Nobody has it: step 2 of the call order "Nights" is told.',
    ])
    // There is no third.
    expect(plan({ atMs: T0 + 900 * MINUTE_MS, incident: { ...open, told: incident!.told } }).tell).toEqual([])
  })

  it.each([
    ['somebody has it', { isHeld: true }],
    ['it is muted', { mutedUntilMs: T0 + 60 * MINUTE_MS }],
    ['it has cleared', { clearedAtMs: T0 + MINUTE_MS, ruleIds: [] }],
  ])('goes to no next step while %s', (_name, over) => {
    expect(plan({ atMs: T0 + 30 * MINUTE_MS, incident: { ...open, ...over } }).tell).toEqual([])
  })

  it('passes over a step that reaches nobody, and says so', () => {
    const empty = { ...order, steps: [{ afterMinutes: 0, to: [] }, ...order.steps.slice(1)] }
    const { tell, entries } = plan({ changes: [raises(few)], callOrders: new Map([['order', empty]]) })
    expect(tell.map(({ kind }) => kind)).toEqual(['next'])
    expect(entries.map(({ text }) => text).slice(1)).toEqual([
      'Step 1 of the call order "Nights" reaches nobody.',
      'Nobody has it: step 2 of the call order "Nights" is told.',
    ])
  })

  it('clears with the last rule, and those who were told hear of it once', () => {
    const both = { ...open, ruleIds: ['few', 'split'] }
    const atMs = T0 + 5 * MINUTE_MS
    const first = plan({ atMs, changes: [clears(split, atMs)], incident: both })
    expect(first.incident?.ruleIds).toEqual(['few'])
    expect(first.tell).toEqual([])
    const last = plan({ atMs, changes: [clears(few, atMs)], incident: open })
    expect(last.incident).toMatchObject({ clearedAtMs: atMs, ruleIds: [] })
    expect(last.entries.map(({ kind }) => kind)).toEqual(['cleared', 'cleared-all'])
    expect(last.tell).toEqual([{ kind: 'cleared', to: 'told', because: 'Nothing is raised in it any more.' }])
    expect(plan({ atMs: atMs + MINUTE_MS, incident: last.incident }).tell).toEqual([])
  })

  it('is raised again in the same incident until it is resolved, and is told from the first step', () => {
    const cleared = { ...open, clearedAtMs: T0 + MINUTE_MS, ruleIds: [] }
    const atMs = T0 + 2 * MINUTE_MS
    const { incident, isNew, tell, entries } = plan({
      ...{ atMs, changes: [raises(few, { atMs })], incident: cleared },
    })
    expect(isNew).toBe(false)
    expect(incident).toMatchObject({ id: 'i', clearedAtMs: null, ruleIds: ['few'] })
    expect(tell.map(({ kind }) => kind)).toEqual(['raised'])
    expect(entries.map(({ kind }) => kind)).toEqual(['reopened', 'told'])
  })

  it('resolves by itself a day after it has cleared', () => {
    const cleared = { ...open, clearedAtMs: T0, ruleIds: [] }
    expect(plan({ atMs: T0 + RESOLVES_AFTER_MS - 1, incident: cleared }).incident?.resolvedAtMs).toBeNull()
    const { incident, tell } = plan({ atMs: T0 + RESOLVES_AFTER_MS, incident: cleared })
    expect(incident?.resolvedAtMs).toBe(T0 + RESOLVES_AFTER_MS)
    expect(tell).toEqual([])
  })

  it('is recorded in maintenance and told to nobody; when the window ends and it still holds, it is told', () => {
    const covered = new Map([['few', 'Switches of Pinnet Bay']])
    const first = plan({ changes: [raises(few)], covered })
    expect(first.incident?.inMaintenance).toBe(true)
    expect(first.tell).toEqual([])
    expect(first.entries.map(({ text }) => text)).toEqual([
      'Few links left: 2 links hold 9 nodes to the other 27.',
      'Maintenance (Switches of Pinnet Bay): recorded, nobody is told.',
    ])
    const after = plan({ atMs: T0 + 30 * MINUTE_MS, incident: first.incident })
    expect(after.incident?.inMaintenance).toBe(false)
    expect(after.tell.map(({ kind, to }) => [kind, to])).toEqual([['raised', [{ userId: 'quill' }]]])
  })

  it('clears where the only rule that was raised in it is gone', () => {
    const { incident, entries } = plan({ rules: [split], incident: open })
    expect(incident?.clearedAtMs).toBe(T0)
    expect(entries.map(({ kind }) => kind)).toEqual(['cleared', 'cleared-all'])
  })
})
