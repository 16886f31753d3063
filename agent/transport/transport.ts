export interface CloseEvent {
  code: number
  reason: string
}

export interface ConnectionListener {
  message(bytes: Uint8Array): void
  /** Once, and last. */
  closed(event: CloseEvent): void
}

/** An open, ordered or unordered way for messages between two programs. Messages keep their bounds. */
export interface Connection {
  /** The other end, for logs. */
  readonly remote: string
  /** Bytes accepted by `send` and not yet handed to the system. */
  readonly bufferedBytes: number
  /** What came before waits until a listener is attached. */
  attach(listener: ConnectionListener): void
  /** Silently nothing once the connection is closing. */
  send(bytes: Uint8Array): void
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
  /** @throws Error where the address cannot be taken */
  listen(init: ListenInit, onConnection: (connection: Connection) => void): Promise<Listening>
  /** Never throws: unreachable, refused and aborted are answers. */
  dial(address: string, signal: AbortSignal): Promise<DialResult>
}

/** Code of a connection that ended without a closing message (RFC 6455 §7.1.5). */
export const LOST_CODE = 1006
