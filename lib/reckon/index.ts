export type { JobName, Jobs } from './jobs'
export { PATIENCE_MS, ReckonError, Reckoner } from './reckoner'
