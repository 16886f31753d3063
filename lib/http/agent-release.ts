import { agentFilePath, registerAgentFile } from '@/lib/data/agent-file'
import { forkEm } from '@/lib/db'
import { getRuntime } from './runtime'

/** Makes the agent that was built on this server one of the versions that can be offered. A server serves without it. */
export async function offerAgentFile(): Promise<void> {
  const { log } = getRuntime()
  try {
    const file = await registerAgentFile(await forkEm(), agentFilePath())
    if (file === null) log.warn({}, 'there is no agent file: npm run build:agent makes it')
  } catch (error) {
    log.warn({ err: error }, 'the agent file could not be kept as a release')
  }
}
