import { expect, it } from 'vitest'
import { orderedNow } from '@/lib/collector/audit/course-figures'
import { type ControlState, initialControl } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'

const control = (over: Partial<ControlState>): ControlState => ({
  ...initialControl(0, PACES.steady),
  ...over,
})

it.each([
  ['is that of the whole', control({ linkTimePerSecond: 0.2 }), 0.2],
  [
    'is the larger where another follows',
    control({ linkTimePerSecond: 0.2, next: { linkTimePerSecond: 0.5, fromAtMs: 1_000 } }),
    0.5,
  ],
  [
    'is that of those still heard while the whole stands still',
    control({
      linkTimePerSecond: 0.2,
      parts: [
        { agents: ['tar-01', 'tar-02'], place: 0, control: control({ linkTimePerSecond: 1.6 }) },
        { agents: ['eel-01', 'eel-02'], place: 1, control: null },
      ],
    }),
    1.6,
  ],
])('the link time that agents may have walked %s', (_, state, expected) => {
  expect(orderedNow(0, state).linkTimePerSecond).toBe(expected)
})
