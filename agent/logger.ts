/** What the agent asks of a logger; a pino logger is one. Data never holds keys, tokens, passes or codes. */
export interface Logger {
  debug(data: object, message: string): void
  info(data: object, message: string): void
  warn(data: object, message: string): void
  error(data: object, message: string): void
}

export const silentLogger: Logger = { debug() {}, info() {}, warn() {}, error() {} }
