/** npx tsx scripts/demo/write-examples.ts: writes Harbourline's links and nodes as `npm run fleet` reads them. */
import { mkdirSync, writeFileSync } from 'node:fs'
import { edgesCsv, harbourline, nodesCsv } from './topology'

const folder = new URL('../../examples/harbourline/', import.meta.url)
mkdirSync(folder, { recursive: true })
const scenario = harbourline()
writeFileSync(new URL('edges.csv', folder), edgesCsv(scenario))
writeFileSync(new URL('nodes.csv', folder), nodesCsv(scenario))
