import { afterEach, describe, expect, test } from 'vitest'
import {
  type Connection,
  createClock,
  createWsTransport,
  type Listening,
  MemoryNetwork,
  type Transport,
} from '@/agent'
import { MAX_FRAME_BYTES } from '@/lib/protocol'
import { freePort } from '../support/free-port'
import { privateCa } from '../support/private-ca'
import { createSocketTransport } from '../support/socket-transport'
import { Bell, within } from '../support/until'

const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const signal = new AbortController().signal

const { ca, cert, key } = privateCa(['127.0.0.1', '::1'])

const implementations: Record<string, { make: () => [Transport, Transport]; host: string; nowhere: string }> =
  {
    WebSocket: {
      make: () => [createWsTransport({ clock }), createWsTransport({ clock })],
      host: '127.0.0.1',
      nowhere: 'ws://127.0.0.1:1',
    },
    memory: {
      make: () => {
        const network = new MemoryNetwork({ clock })
        return [network.transport('tar-01'), network.transport('gul-04')]
      },
      host: 'gul-04',
      nowhere: 'memory://nowhere:1',
    },
    'an embedding program’s own sockets': {
      make: () => [createSocketTransport(), createSocketTransport()],
      host: '127.0.0.1',
      nowhere: 'tcp://127.0.0.1:1',
    },
    'WebSocket over IPv6': {
      make: () => [createWsTransport({ clock }), createWsTransport({ clock })],
      host: '::1',
      nowhere: 'ws://[::1]:1',
    },
    'WebSocket over TLS with a private CA': {
      make: () => [
        createWsTransport({ clock }, { tls: { ca } }),
        createWsTransport({ clock }, { tls: { ca, cert, key } }),
      ],
      host: '127.0.0.1',
      nowhere: 'wss://127.0.0.1:1',
    },
  }

describe.each(Object.entries(implementations))('a link over %s', (_, { make, host, nowhere }) => {
  const opened: Listening[] = []
  afterEach(async () => {
    for (const listening of opened.splice(0)) await listening.close()
  })

  async function pair(): Promise<{
    dialed: Recorder
    accepted: Recorder
    address: string
    dialer: Transport
  }> {
    const [dialer, listener] = make()
    let arrived: (connection: Connection) => void = () => {}
    const arrival = new Promise<Connection>((resolve) => {
      arrived = resolve
    })
    const listening = await listener.listen({ host, port: 0 }, (connection) => arrived(connection))
    opened.push(listening)
    const result = await dialer.dial(listening.address, signal)
    if (!result.ok) throw new Error(result.reason)
    return {
      dialed: new Recorder(result.connection),
      accepted: new Recorder(await arrival),
      address: listening.address,
      dialer,
    }
  }

  test('takes a free port and says which', async () => {
    const { address, dialed, accepted } = await pair()
    expect(address).toMatch(/:\d+$/)
    expect(address).not.toMatch(/:0$/)
    dialed.connection.close(4416, '')
    await accepted.closed
  })

  test('carries messages whole, in order, both ways', async () => {
    const { dialed, accepted } = await pair()
    for (let size = 0; size < 40; size++) dialed.connection.send(new Uint8Array(size).fill(size))
    accepted.connection.send(Uint8Array.from([7]))
    const received = await accepted.take(40)
    expect(received.map((bytes) => [bytes.length, bytes[0]])).toEqual(
      Array.from({ length: 40 }, (_, size) => [size, size === 0 ? undefined : size]),
    )
    expect([...(await dialed.take(1))[0]!]).toEqual([7])
    dialed.connection.close(4416, '')
    await accepted.closed
  })

  test('keeps what arrives before anyone listens', async () => {
    const [dialer, listener] = make()
    const listening = await listener.listen({ host, port: 0 }, (connection) => {
      connection.send(Uint8Array.from([1]))
      connection.send(Uint8Array.from([2]))
      connection.close(4416, 'said all')
    })
    opened.push(listening)
    const result = await dialer.dial(listening.address, signal)
    if (!result.ok) throw new Error(result.reason)
    await new Promise((resolve) => clock.after(30, () => resolve(null)))
    const recorder = new Recorder(result.connection)
    expect((await recorder.take(2)).map((bytes) => bytes[0])).toEqual([1, 2])
    expect(await recorder.closed).toEqual({ code: 4416, reason: 'said all' })
  })

  test('tells both ends the code and the reason of a close, once', async () => {
    const { dialed, accepted } = await pair()
    dialed.connection.close(4412, 'A counter fell.')
    dialed.connection.close(4400, 'again')
    expect(await accepted.closed).toEqual({ code: 4412, reason: 'A counter fell.' })
    expect(await dialed.closed).toMatchObject({ code: 4412 })
    dialed.connection.send(Uint8Array.from([1]))
    accepted.connection.send(Uint8Array.from([1]))
  })

  test('a reason longer than the protocol holds is shortened, not thrown at', async () => {
    const { dialed, accepted } = await pair()
    dialed.connection.close(4400, 'ä'.repeat(200))
    expect((await accepted.closed).reason.startsWith('ääää')).toBe(true)
  })

  test('a message larger than any frame ends the connection', async () => {
    const { dialed, accepted } = await pair()
    dialed.connection.send(new Uint8Array(MAX_FRAME_BYTES + 1))
    expect(await dialed.closed).toMatchObject({ code: 1009 })
    await accepted.closed
    expect(accepted.received).toHaveLength(0)
  })

  test('dialing where nothing listens is an answer, not an exception', async () => {
    const [dialer] = make()
    expect(await dialer.dial(nowhere, signal)).toMatchObject({ ok: false, reason: expect.any(String) })
    expect(await dialer.dial('nonsense', signal)).toMatchObject({ ok: false })
    expect(await dialer.dial(nowhere, AbortSignal.abort())).toEqual({ ok: false, reason: 'aborted' })
  })

  test('an address that is taken is refused; one that was closed is free at once', async () => {
    const [, listener] = make()
    const first = await listener.listen({ host, port: await freePort() }, () => {})
    await expect(listener.listen({ host, port: first.port }, () => {})).rejects.toThrow()
    await first.close()
    const second = await listener.listen({ host, port: first.port }, () => {})
    expect(second.address).toBe(first.address)
    opened.push(second)
  })

  test('connections outlive the listener', async () => {
    const { dialed, accepted } = await pair()
    for (const listening of opened.splice(0)) await listening.close()
    dialed.connection.send(Uint8Array.from([5]))
    expect((await accepted.take(1))[0]![0]).toBe(5)
    dialed.connection.close(4416, '')
    await accepted.closed
  })
})

describe('a certificate of a private CA', () => {
  test('is refused by whoever does not know the CA, and so is one for another host', async () => {
    const other = privateCa(['192.0.2.1'])
    const listening = await createWsTransport({ clock }, { tls: { cert, key } }).listen(
      { host: '127.0.0.1', port: 0 },
      () => {},
    )
    const strange = await createWsTransport({ clock }, { tls: { cert: other.cert, key: other.key } }).listen(
      { host: '127.0.0.1', port: 0 },
      () => {},
    )
    expect(listening.address).toMatch(/^wss:/)
    for (const [trusted, { address }] of [
      [undefined, listening],
      [other.ca, listening],
      [other.ca, strange],
    ] as const) {
      const result = await createWsTransport({ clock }, { tls: { ca: trusted } }).dial(address, signal)
      expect(result).toMatchObject({ ok: false, reason: expect.any(String) })
    }
    const plain = await createWsTransport({ clock }).dial(listening.address.replace('wss:', 'ws:'), signal)
    expect(plain.ok).toBe(false)
    await listening.close()
    await strange.close()
  })

  test('that does not fit its key is refused where it is given', async () => {
    const transport = createWsTransport({ clock }, { tls: { cert, key: privateCa(['127.0.0.1']).key } })
    await expect(transport.listen({ host: '127.0.0.1', port: 0 }, () => {})).rejects.toThrow()
  })
})

class Recorder {
  readonly connection: Connection
  readonly received: Uint8Array[] = []
  readonly closed: Promise<{ code: number; reason: string }>
  private readonly bell = new Bell()

  constructor(connection: Connection) {
    this.connection = connection
    const closed = new Promise<{ code: number; reason: string }>((resolve) => {
      connection.attach({
        message: (bytes) => {
          this.received.push(bytes)
          this.bell.ring()
        },
        closed: resolve,
      })
    })
    this.closed = within('the end of a connection', closed)
    // Not every test waits for it.
    this.closed.catch(() => undefined)
  }

  async take(count: number): Promise<Uint8Array[]> {
    await this.bell.until(() => this.received.length >= count)
    return this.received
  }
}
