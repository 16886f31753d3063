export { changeConfig, dropDraft, putAside, readConfig, renewPass, writeConfig } from './file'
export {
  type AgentConfig,
  type ConfigDraft,
  type ConfigError,
  type ConfigResult,
  configSchema,
  type HeldRing,
  parseConfig,
  ringOf,
} from './schema'
