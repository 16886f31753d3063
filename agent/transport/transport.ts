/**
 * How messages between two agents travel. WebSocket is one implementation, memory another; an embedding program that
 * wants the overlay's own connections measured writes a third and gives it to `createAgent` as `transport`
 * (`linkKind: 'connection'` then says so with the reading). It has to keep to the comments below and no more: no
 * encryption or proof of identity is asked for (the handshake sees to that), no order, no delivery. Frames carry
 * totals, so what is lost, repeated or overtaken does no harm but to the link's weight. Only the handshake's four
 * messages have to come in order on an otherwise quiet connection, or the link is dialed anew.
 *
 * `tests/contract/transport.test.ts` is the contract as a test, and `tests/support/socket-transport.ts` an
 * implementation of some eighty lines over plain sockets.
 */

export interface CloseEvent {
  /** As the end that closed said it, 1000 to 4999; `LOST_CODE` where the connection broke. */
  code: number
  reason: string
}

export interface ConnectionListener {
  /** The bytes are not changed later. */
  message(bytes: Uint8Array): void
  /** Once, and last. */
  closed(event: CloseEvent): void
}

/**
 * An open, ordered or unordered way for messages between two programs. Messages keep their bounds. One with more than
 * `MAX_FRAME_BYTES` (272 KiB) ends the connection with code 1009 at its receiver, before it is held in memory whole.
 */
export interface Connection {
  /** The other end as `host:port`, for logs and for counting strangers per host. */
  readonly remote: string
  /** Bytes accepted by `send` and not yet handed to the system. */
  readonly bufferedBytes: number
  /** Called once. What came before waits until then (`Inbox` keeps it). */
  attach(listener: ConnectionListener): void
  /** Never throws and never waits; silently nothing once the connection is closing. The bytes are not changed later. */
  send(bytes: Uint8Array): void
  /**
   * Says code and reason to the other end and ends the connection, within a few seconds even where that does not
   * answer; then both listeners hear `closed`. The reason may be shortened. Closing again does nothing.
   */
  close(code: number, reason: string): void
}

export interface ListenInit {
  host: string
  /** 0 for any that is free. */
  port: number
}

export interface Listening {
  /** The address to dial, with the port actually taken. */
  readonly address: string
  readonly port: number
  /** Takes no more connections; those that are open stay. */
  close(): Promise<void>
}

export type DialResult = { ok: true; connection: Connection } | { ok: false; reason: string }

export interface Transport {
  /** Calls `onConnection` for each connection, as soon as it is open. @throws Error where the address cannot be taken */
  listen(init: ListenInit, onConnection: (connection: Connection) => void): Promise<Listening>
  /** Addresses are whatever `Listening.address` said there. Never throws: unreachable, refused and aborted are answers. */
  dial(address: string, signal: AbortSignal): Promise<DialResult>
}

/** Code of a connection that ended without a closing message (RFC 6455 §7.1.5). */
export const LOST_CODE = 1006
