import { hash32 } from '../random'

/** Which half an agent stands on in a seeding: 0 for X, 1 for Y. */
export function halfOf(salt: number, colony: number, agentId: string): 0 | 1 {
  return (hash32(salt, colony, agentId) & 1) === 0 ? 0 : 1
}
