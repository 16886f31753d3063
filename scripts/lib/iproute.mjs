import { existsSync } from 'node:fs'

const PLACES = ['/usr/sbin/ip', '/sbin/ip', '/usr/bin/ip', '/bin/ip']

/**
 * Where iproute2's command is, else null.
 * @param {(path: string) => boolean} exists
 */
export function findIproute(exists = existsSync) {
  return PLACES.find((path) => exists(path)) ?? null
}
