export {
  Agent,
  type AgentComponents,
  type AgentIdentity,
  type AgentInit,
  type AgentStatus,
  createAgent,
} from './agent'
export { type Backoff, DIAL_BACKOFF } from './backoff'
export { type Clock, createClock, sleep } from './clock'
export {
  type CollectorClient,
  type CollectorError,
  type CollectorResult,
  describeCollectorError,
  mayRetry,
} from './collector/client'
export { createHttpCollector } from './collector/http-client'
export { createPost, type Post } from './collector/post'
export { type EnrolInit, enrol } from './enrol'
export type { LinkEvent } from './link/link-contract'
export type { LinkStatus } from './link/link-status'
export type { NeighbourSpec } from './link/neighbours'
export { type Logger, silentLogger } from './logger'
export { MemoryNetwork, type Weather } from './transport/memory'
export type { Connection, ListenInit, Listening, Transport } from './transport/transport'
export { createWsTransport } from './transport/ws'
