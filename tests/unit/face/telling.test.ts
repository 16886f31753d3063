import { expect, it } from 'vitest'
import { watcherNow } from '@/lib/face/telling'

const AT = '2026-12-02T04:00:00.000Z'
const ago = (seconds: number) => new Date(Date.parse(AT) - seconds * 1000).toISOString()
const ALIVE = { isAlive: true, evaluatedAt: ago(4), sentAt: ago(2) }

it.each<[string, Parameters<typeof watcherNow>[0]['watcher'], string[]]>([
  [
    'nobody watches from outside',
    { ...ALIVE, heartbeatAt: null },
    [
      'Rules are being evaluated and messages sent.',
      'Nobody outside would notice if this server fell silent: no heartbeat has been taken yet. Set THINSPAN_HEARTBEAT_URL to an address that raises the alarm when it is not called.',
    ],
  ],
  [
    'all is well',
    { ...ALIVE, heartbeatAt: ago(30) },
    ['Rules are being evaluated and messages sent.', 'The heartbeat was last taken 30 s ago.'],
  ],
  [
    'sending has stood still for long',
    { isAlive: false, evaluatedAt: ago(4), sentAt: ago(7200), heartbeatAt: ago(7200) },
    [
      'Warnings stand still: rules were last evaluated 4 s ago, the outbox was last looked through 2 h ago. Nobody is told of anything until this server and its database work again.',
      'The heartbeat is late: it was last taken 2 h ago. Whoever watches it should have raised the alarm.',
    ],
  ],
  [
    'nothing has lived yet',
    { isAlive: false, evaluatedAt: null, sentAt: null, heartbeatAt: null },
    [
      'Warnings stand still: rules have not been evaluated yet, the outbox has not been looked through yet. Nobody is told of anything until this server and its database work again.',
      'Nobody outside would notice if this server fell silent: no heartbeat has been taken yet. Set THINSPAN_HEARTBEAT_URL to an address that raises the alarm when it is not called.',
    ],
  ],
])('the watcher says of itself: %s', (_, watcher, sentences) => {
  expect(watcherNow({ watcher, at: AT })).toEqual(sentences)
})
