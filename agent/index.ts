export { Agent, createAgent } from './agent'
export type { AgentComponents, AgentIdentity, AgentInit, AgentStatus, Ending } from './agent-contract'
export { createSpoolFile, type SpoolStore } from './away/spool-store'
export { type Backoff, DIAL_BACKOFF } from './backoff'
export { type Clock, createClock, sleep } from './clock'
export {
  type CollectorClient,
  type CollectorError,
  type CollectorResult,
  type DirectoryReply,
  describeCollectorError,
  isEnded,
  mayRetry,
  type SentReport,
} from './collector/client'
export { createHttpCollector } from './collector/http-client'
export { createPost, type Post } from './collector/post'
export { type EnrolInit, enrol } from './enrol'
export type { SourceNote } from './health'
export type { LinkEvent } from './link/link-contract'
export type { LinkStatus } from './link/link-status'
export type { NeighbourSpec } from './link/neighbours'
export { type Logger, silentLogger } from './logger'
export { Inbox } from './transport/inbox'
export { MemoryNetwork, type Weather } from './transport/memory'
export {
  type Connection,
  type ConnectionListener,
  type DialResult,
  type ListenInit,
  type Listening,
  LOST_CODE,
  type Transport,
} from './transport/transport'
export { createWsTransport, type WsInit, type WsTls } from './transport/ws'
export type { HeldRing } from './trust/key-ring'
export type { KeyChange, RotationError, RotationResult } from './trust/own-keys'
