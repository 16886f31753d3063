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

const root = resolve(import.meta.dirname, '..')
// Beside a running `npm start` it needs no address.
process.env.DATABASE_URL ||= findOwnDatabase(dataFolderOf(process.env, root)) ?? ''
const file = await ensureCollectorFile(root)
// With all processors busy, threads that help to collect garbage take more from the others than they save.
cluster.setupPrimary({ exec: file, execArgv: ['--single-threaded-gc', '--max-semi-space-size=32'] })
await import(pathToFileURL(file).href)
