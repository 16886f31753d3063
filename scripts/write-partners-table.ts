/** npx tsx scripts/write-partners-table.ts: writes the table of docs/partners.md anew from the permission table. */
import { readFileSync, writeFileSync } from 'node:fs'
import { overlayTable } from '@/lib/auth/overlay-table'

const file = new URL('../docs/partners.md', import.meta.url)
const [before = '', rest = ''] = readFileSync(file, 'utf8').split('<!-- table -->\n')
const after = rest.split('<!-- /table -->')[1] ?? ''
writeFileSync(file, `${before}<!-- table -->\n\n${overlayTable()}\n\n<!-- /table -->${after}`)
