#!/usr/bin/env node
/** `npm run restore -- FILE [--replace]`: a backup into an empty database, or in the place of another. Composition root. */
import { resolve } from 'node:path'
import { openDatabaseAtHand } from './lib/database-at-hand.mjs'
import { restoreDatabase } from './lib/dump.mjs'

const root = resolve(import.meta.dirname, '..')
const words = process.argv.slice(2)
const [file, ...rest] = words.filter((word) => word !== '--replace')
try {
  if (file === undefined || file.startsWith('-') || rest.length > 0)
    throw new Error('Name one file: npm run restore -- thinspan.backup [--replace]')
  const { url, close } = await openDatabaseAtHand(process.env, root, { make: true })
  try {
    await restoreDatabase(url, resolve(file), { replace: words.includes('--replace') })
  } finally {
    await close()
  }
  process.stdout.write(`Restored from ${resolve(file)}. The next "npm start" brings it up to date.\n`)
} catch (error) {
  process.stderr.write(`${error.message}\n`)
  process.exitCode = 1
}
