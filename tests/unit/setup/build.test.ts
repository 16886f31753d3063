import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { dirname, join } from 'node:path'
import { afterAll, describe, expect, it } from 'vitest'
import { hashSources, reasonToBuild, sourceFiles } from '@/scripts/lib/build.mjs'

const hashOf = (files: Record<string, string>) =>
  hashSources(Object.keys(files).sort(), (name: string) => Buffer.from(files[name] ?? ''))

describe('hashSources', () => {
  const files = { 'app/page.tsx': 'export default 1', 'lib/a.ts': 'export {}' }
  it('is the same for the same files', () => {
    expect(hashOf({ ...files })).toBe(hashOf(files))
  })
  const changes = [
    ['a changed file', { ...files, 'lib/a.ts': 'export { }' }],
    ['a renamed file', { 'app/page.tsx': 'export default 1', 'lib/b.ts': 'export {}' }],
    ['a new empty file', { ...files, 'lib/c.ts': '' }],
    ['text moved from one file to the next', { 'app/page.tsx': 'export default 1export', 'lib/a.ts': ' {}' }],
    ['text moved from content to name', { 'app/page.tsx': 'xport default 1', 'lib/a.ts': 'export {}' }],
  ] as const
  it.each(changes)('differs for %s', (_, changed) => {
    expect(hashOf(changed)).not.toBe(hashOf(files))
  })
})

describe('sourceFiles', () => {
  const root = mkdtempSync(join(tmpdir(), 'thinspan-sources-'))
  afterAll(() => rmSync(root, { recursive: true }))
  it('lists what a build is made from, and nothing of tests, scripts, notes or output', () => {
    const made = [
      'app/(console)/page.tsx',
      'fonts/a.woff2',
      'lib/deep/er/a.ts',
      'migrations/index.ts',
      'proxy.ts',
    ]
    const configs = ['next.config.mjs', 'package-lock.json', 'tailwind.config.ts', 'tsconfig.json']
    const others = ['.next/app.ts', 'next-env.d.ts', 'node_modules/x/a.ts', 'README.md', 'scripts/start.mjs']
    for (const file of [...made, ...configs, ...others, 'tests/unit/a.test.ts', 'vitest.config.ts']) {
      mkdirSync(dirname(join(root, file)), { recursive: true })
      writeFileSync(join(root, file), file)
    }
    expect(sourceFiles(root)).toEqual([...made, ...configs].sort())
  })
})

describe('reasonToBuild', () => {
  const cases = [
    ['there was none', { hasBuild: false, stamp: null }],
    ['there was none', { hasBuild: false, stamp: 'new' }],
    ['the last one did not finish', { hasBuild: true, stamp: null }],
    ['the sources changed', { hasBuild: true, stamp: 'old' }],
    [null, { hasBuild: true, stamp: 'new' }],
  ] as const
  it.each(cases)('is %j for %j', (reason, state) => {
    expect(reasonToBuild({ ...state, hash: 'new' })).toBe(reason)
  })
})
