export { switchOffIdleStorages } from './idle-storages'
export { Listener, type ListenFunction } from './listener'
export { acquireLock as acquireLockAt, type HeldLock, LockSession, type LockSettings, withLock } from './lock'
export { migrate } from './migrate'
export { NOTICE_MAX_BYTES, notify } from './notify'
export { type EntityManager, type Orm, openOrm, sql } from './orm'
export { cutoffOf, dropPartitions, endOf, ensurePartitions, partitionsAround } from './partitions'
export {
  acquireLock,
  closeDatabase,
  databaseUrl,
  forkEm,
  getOrm,
  overlayLockKey,
  STATEMENT_TIMEOUT_MS,
  subscribe,
  withOverlayLock,
} from './process'
export * from './series'
