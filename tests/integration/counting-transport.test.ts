import { expect, test } from 'vitest'
import { type Connection, createClock, createWsTransport } from '@/agent'
import { CountingProxy } from '@/scripts/bench/agent/counting-proxy'
import { countingTransport } from '@/scripts/bench/agent/counting-transport'

const SIZES = [0, 1, 125, 126, 65_535, 65_536]

test('messages of any size count as many bytes as a proxy between the ends sees', async () => {
  const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
  const transport = createWsTransport({ clock })
  let accept: (connection: Connection) => void = () => {}
  const accepted = new Promise<Connection>((resolve) => {
    accept = resolve
  })
  const listening = await transport.listen({ host: '127.0.0.1', port: 0 }, (connection) => accept(connection))
  const proxy = new CountingProxy({ targetPort: () => listening.port })
  const counts = { bytes: 0, messages: 0 }
  const counted = countingTransport(transport, counts)
  const dialed = await counted.dial(`ws://127.0.0.1:${await proxy.start()}`, new AbortController().signal)
  if (!dialed.ok) throw new Error(dialed.reason)
  const listener = await accepted
  const opening = proxy.bytesIn + proxy.bytesOut
  // Each that comes is sent back, so that after the last one all have crossed both ways.
  listener.attach({ message: (bytes) => listener.send(bytes), closed: () => {} })
  let left = SIZES.length
  const returned = new Promise<void>((resolve) => {
    dialed.connection.attach({
      message: () => {
        left -= 1
        if (left === 0) resolve()
      },
      closed: () => {},
    })
  })
  for (const size of SIZES) dialed.connection.send(new Uint8Array(size))
  await returned
  expect({ ...counts }).toEqual({
    messages: 2 * SIZES.length,
    bytes: proxy.bytesIn + proxy.bytesOut - opening,
  })
  dialed.connection.close(1000, '')
  await listening.close()
  await proxy.stop()
})
