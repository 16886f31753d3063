#!/usr/bin/env node
/** `npm run backup -- FILE`: the whole database into one file, while everything runs. Composition root. */
import { resolve } from 'node:path'
import { openDatabaseAtHand } from './lib/database-at-hand.mjs'
import { dumpDatabase } from './lib/dump.mjs'

const root = resolve(import.meta.dirname, '..')
const [file, ...rest] = process.argv.slice(2)
try {
  if (file === undefined || file.startsWith('-') || rest.length > 0)
    throw new Error('Name one file: npm run backup -- thinspan.backup')
  const { url, close } = await openDatabaseAtHand(process.env, root, { make: false })
  try {
    await dumpDatabase(url, resolve(file))
  } finally {
    await close()
  }
  process.stdout.write(
    `Backed up to ${resolve(file)}. It holds the overlays' signing keys: keep it where nobody else can read it.\n`,
  )
} catch (error) {
  process.stderr.write(`${error.message}\n`)
  process.exitCode = 1
}
