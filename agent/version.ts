/** Version of the agent's program, as it says it to collectors. */
export const AGENT_VERSION = '0.1.0'
