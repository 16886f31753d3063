/** The texts of the Joining page, all in this one place: they are typed as they stand. */
export { byHandCommands, downloadCommands, exampleCommands, trialCommands } from './by-hand'
export { containerCommands, containerfile, ownNodeCommands } from './container'
export { AGENT_RULES, NEIGHBOUR_SOURCES } from './neighbours'
export { type NetworkNote, networkNotes, onlyThisMachine } from './network'
export { ENV_FILE, environment, SERVICE_UNIT, serviceCommands, serviceUpgradeCommands } from './service'
export {
  AGENT_PORT,
  type AgentFile,
  CODE_PLACEHOLDER,
  type Command,
  FILE_NAME,
  type JoiningInput,
  PLACEHOLDERS,
} from './types'
export { unattendedCommands } from './unattended'
