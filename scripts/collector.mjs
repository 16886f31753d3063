#!/usr/bin/env node
/**
 * `npm run collector`: takes agents' reports in and leads overlays, beside any number of others on the same database. PORT (default
 * 3100), HOST (default 127.0.0.1), DATABASE_URL, INGEST_PROCESSES. Builds the program and runs it here and in processes of its own.
 * Composition root.
 */
import cluster from 'node:cluster'
import { resolve } from 'node:path'
import { pathToFileURL } from 'node:url'
import { ensureCollectorFile } from './lib/collector-file.mjs'
import { dataFolderOf, findOwnDatabase } from './lib/own-database.mjs'

/**
 * With all processors busy, threads that help to collect garbage take more from others than they save; and what is made at one place
 * is taken for long-lived after a few that were, though reports seldom are. Measured; see DEVELOPERS.md.
 */
const INTAKE_FLAGS = ['--single-threaded-gc', '--no-allocation-site-pretenuring', '--max-semi-space-size=32']

const root = resolve(import.meta.dirname, '..')
// The agent's file and the thread for exact figures are looked for from here, wherever it was started.
process.chdir(root)
// Beside a running `npm start` it needs no address.
process.env.DATABASE_URL ||= findOwnDatabase(dataFolderOf(process.env, root)) ?? ''
try {
  const file = await ensureCollectorFile(root)
  cluster.setupPrimary({ exec: file, execArgv: [...process.execArgv, ...INTAKE_FLAGS] })
  await import(pathToFileURL(file).href)
} catch (error) {
  process.stderr.write(`${error.message}\n`)
  process.exitCode = 1
}
