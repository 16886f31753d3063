import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, expect, test } from 'vitest'
import { newPasswordSchema } from '@/lib/data/dto'
import { generateKeys, pemOf } from '@/lib/protocol'
import { type Kept, openKept } from '@/scripts/demo/kept'
import { newPassword } from '@/scripts/demo/people'

let folder: string
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'demo-kept-'))
})
afterEach(() => rmSync(folder, { recursive: true }))

const kept = (): Kept => ({
  version: 1,
  passwords: { 'r.quill@harbourline.example': 'quay-buoy-tide-mast' },
  joiningCode: null,
  keys: { 'tar-01': pemOf(generateKeys().privateKey) },
})
const path = () => join(folder, 'demo', 'demo.json')

test('what is kept comes back at the next start, readable by its owner alone', () => {
  const first = openKept(folder, kept)
  expect(first.isNew).toBe(true)
  first.save({ ...first.kept, joiningCode: 'AAAAA-BBBBB-CCCCC-DDDDD' })
  const second = openKept(folder, () => {
    throw new Error('made anew')
  })
  expect(second).toMatchObject({
    isNew: false,
    kept: { ...first.kept, joiningCode: 'AAAAA-BBBBB-CCCCC-DDDDD' },
  })
  expect(statSync(path()).mode & 0o777).toBe(0o600)
})

test.each([
  ['', 'empty'],
  ['{"version":1', 'torn'],
  ['{"version":1,"keys":{"tar-01":"x"}}', 'of another shape'],
])('a file that holds %j (%s) is made anew', (text) => {
  openKept(folder, kept)
  writeFileSync(path(), text)
  expect(openKept(folder, kept).isNew).toBe(true)
  expect(JSON.parse(readFileSync(path(), 'utf8'))).toHaveProperty('keys.tar-01')
})

test('a demo password is four words, long enough, and drawn without favour', () => {
  let next = 0
  const counting = (count: number) => Uint8Array.from({ length: count }, () => next++ % 256)
  const words = new Map<string, number>()
  for (let i = 0; i < 256; i++) {
    const password = newPassword(counting)
    expect(newPasswordSchema.safeParse(password).success).toBe(true)
    const parts = password.split('-')
    expect(parts).toHaveLength(4)
    for (const word of parts) words.set(word, (words.get(word) ?? 0) + 1)
  }
  const counts = [...words.values()]
  expect(words.size).toBeGreaterThanOrEqual(50)
  expect(Math.max(...counts) - Math.min(...counts)).toBeLessThanOrEqual(4)
})
