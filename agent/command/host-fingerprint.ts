import { createHash } from 'node:crypto'

/**
 * Tells machines apart without telling which one it is: systemd's machine-id must not leave the machine as it is
 * (machine-id(5)). The name counts too, as copied images often share the id.
 */
export function hostFingerprint(machineId: string | null, hostname: string): string | null {
  if (machineId === null || machineId.trim() === '') return null
  const hash = createHash('sha256').update(`thinspan-host\n${machineId.trim()}\n${hostname}`, 'utf8')
  return hash.digest('base64url')
}
