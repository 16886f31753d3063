import { expect, test } from 'vitest'
import { fuzzIntake } from '../../../support/fuzzed-intake'
import { testOverlay } from '../../../support/passes'

test('10,000 random and mutated messages of proven peers are taken or refused, never thrown at', () => {
  const outcomes = fuzzIntake(testOverlay(), 'intake', 10_000)
  for (const kind of ['taken', 'bad-frame', 'orders-forged', 'pass', 'relay', 'relayReply', 'sent-fell'])
    expect([kind, outcomes.get(kind) ?? 0]).toEqual([kind, expect.toSatisfy((times: number) => times > 0)])
})
