import { expect, test } from 'vitest'
import { RelayShelf, SHELF_MOST_BYTES } from '@/agent/away/relay-shelf'
import { ReturnPaths } from '@/agent/away/return-paths'
import { MAX_RELAYED, MAX_RELAYED_REPORT_BYTES, RELAYED_MOST_SECONDS } from '@/lib/protocol'

const report = (agentId: string, second = 0, body = `{"of":"${agentId}"}`) => ({
  agentId,
  at: new Date(Date.UTC(2031, 4, 6, 12, 0, second)).toISOString(),
  body,
  signature: `signature of ${agentId} at ${second}`,
})

test('of one agent the newest report is kept, and each is taken once', () => {
  const shelf = new RelayShelf()
  shelf.put('gul-04', report('eel-09', 2), 0)
  expect(shelf.put('gul-04', report('eel-09', 1), 0)).toBe(false)
  expect(shelf.put('gul-04', report('eel-09', 4), 0)).toBe(true)
  expect(shelf.take(0)).toEqual([report('eel-09', 4)])
  expect(shelf.take(0)).toEqual([])
})

test('the same report from two neighbours is delivered once', () => {
  const shelf = new RelayShelf()
  shelf.put('gul-04', report('eel-09'), 0)
  shelf.put('pin-02', report('eel-09'), 0)
  expect(shelf.take(0)).toEqual([report('eel-09')])
})

test('a neighbour that invents reports neither replaces another’s nor crowds them out', () => {
  const shelf = new RelayShelf()
  for (let at = 0; at < 10 * MAX_RELAYED; at++) shelf.put('liar', report(`nobody-${at}`, at % 60), 0)
  shelf.put('liar', report('eel-09', 59, '{"forged":true}'), 0)
  shelf.put('gul-04', report('eel-09', 1), 0)
  const taken = shelf.take(0)
  expect(taken).toHaveLength(MAX_RELAYED)
  expect(taken).toContainEqual(report('eel-09', 1))
})

test('what waited too long is let go', () => {
  const shelf = new RelayShelf()
  shelf.put('gul-04', report('eel-09'), 0)
  shelf.put('gul-04', report('pin-02'), 30_000)
  expect(shelf.take(RELAYED_MOST_SECONDS * 1000 + 1)).toEqual([report('pin-02')])
})

test('one delivery stays within its bytes; the rest goes with the next', () => {
  const shelf = new RelayShelf()
  const long = '"'.padEnd(MAX_RELAYED_REPORT_BYTES - 1, 'x')
  for (let at = 0; at < 12; at++) shelf.put('gul-04', report(`agent-${at}`, 0, long), 0)
  const first = shelf.take(0)
  const bytes = first.reduce((sum, { body }) => sum + body.length, 0)
  expect(bytes).toBeLessThanOrEqual(SHELF_MOST_BYTES)
  expect(first.length + shelf.take(0).length).toBe(12)
})

test('an answer goes back to every neighbour that brought a report of the agent, for as long as it may matter', () => {
  const paths = new ReturnPaths()
  expect(paths.note(report('eel-09', 1), 'gul-04', 0)).toBe(false)
  expect(paths.note(report('eel-09', 1), 'pin-02', 0)).toBe(true)
  expect(paths.note(report('eel-09', 2), 'pin-02', 30_000)).toBe(false)
  expect(paths.to('eel-09', 30_000)).toEqual(['gul-04', 'pin-02'])
  expect(paths.to('eel-09', 61_000)).toEqual(['pin-02'])
  expect(paths.to('nobody', 0)).toEqual([])
})

test('a copy under the same signature with another text does not stand for the genuine report', () => {
  const paths = new ReturnPaths()
  expect(paths.note(report('eel-09', 1, '{"forged":true}'), 'liar', 0)).toBe(false)
  expect(paths.note(report('eel-09', 1), 'gul-04', 0)).toBe(false)
})
