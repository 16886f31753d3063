#!/usr/bin/env node
/** `npm run build:agent`: the agent as one file. Composition root. */
import { join, resolve } from 'node:path'
import { AGENT_FILE, ensureAgentFile } from './lib/agent-file.mjs'

const root = resolve(import.meta.dirname, '..')
const done = await ensureAgentFile(root)
process.stdout.write(`${join(root, AGENT_FILE)}: ${done ?? 'as it was'}\n`)
