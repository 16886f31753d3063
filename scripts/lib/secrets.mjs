/** Server secrets, made once per data folder and readable by its owner only. */
import { randomBytes } from 'node:crypto'
import { chmodSync, existsSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'

const NAMES = ['serverSecret', 'databasePassword']

/** What is there, completed; a file that is not ours is refused, as new secrets would lock the data away. */
export function completeSecrets(text, makeSecret) {
  let had = {}
  if (text !== null) {
    try {
      had = JSON.parse(text)
    } catch {
      had = null
    }
    if (typeof had !== 'object' || had === null) {
      throw new Error(
        'secrets.json is damaged: restore it from a copy, or move the whole data folder away to begin anew.',
      )
    }
  }
  const secrets = {}
  for (const name of NAMES) {
    secrets[name] = typeof had[name] === 'string' && had[name] !== '' ? had[name] : makeSecret()
  }
  return { secrets, changed: NAMES.some((name) => had[name] !== secrets[name]) }
}

export function loadSecrets(folder) {
  const path = join(folder, 'secrets.json')
  const text = existsSync(path) ? readFileSync(path, 'utf8') : null
  const { secrets, changed } = completeSecrets(text, () => randomBytes(32).toString('base64url'))
  if (changed) {
    writeFileSync(`${path}.new`, `${JSON.stringify(secrets, null, 2)}\n`, { mode: 0o600 })
    renameSync(`${path}.new`, path)
  }
  chmodSync(path, 0o600)
  return secrets
}
