/** Put in by the build of the one-file agent. */
declare const THINSPAN_AGENT_VERSION: string | undefined

export const IS_ONE_FILE = typeof THINSPAN_AGENT_VERSION !== 'undefined'

/** Version of the agent's program, as it says it to collectors. From source: the package's, which a test compares. */
export const AGENT_VERSION = typeof THINSPAN_AGENT_VERSION === 'undefined' ? '0.1.0' : THINSPAN_AGENT_VERSION
