import { existsSync } from 'node:fs'

const PLACES = ['/usr/bin/chromium', '/usr/bin/chromium-browser']

/**
 * The browser for the tests: CHROMIUM_PATH, else where distributions put it, else null.
 * @param {Record<string, string | undefined>} env
 * @param {(path: string) => boolean} exists
 */
export function findChromium(env, exists = existsSync) {
  const given = env.CHROMIUM_PATH
  if (!given) return PLACES.find((path) => exists(path)) ?? null
  if (exists(given)) return given
  throw new Error(`CHROMIUM_PATH is ${given} and there is nothing there: correct it, or leave it out.`)
}
