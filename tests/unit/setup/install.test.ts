import { describe, expect, it } from 'vitest'
import { planInstall } from '@/scripts/lib/apt.mjs'
import { reasonToInstall } from '@/scripts/lib/install.mjs'

const zod = { version: '4.6.7', integrity: 'sha512-a' }
const forOtherChip = { version: '1.0.0', integrity: 'sha512-b', optional: true }
const lock = {
  packages: { '': { version: '0.1.0' }, 'node_modules/zod': zod, 'node_modules/x-arm64': forOtherChip },
}
const everywhere = () => true

describe('reasonToInstall', () => {
  it('has none when all that must be there is there', () => {
    expect(
      reasonToInstall({ lock, installed: { packages: { 'node_modules/zod': zod } }, isThere: everywhere }),
    ).toBeNull()
  })
  it('installs into an empty checkout', () => {
    expect(reasonToInstall({ lock, installed: null, isThere: everywhere })).toBe(
      'node_modules is missing or unfinished',
    )
  })
  it('names a package the lock file gained', () => {
    expect(reasonToInstall({ lock, installed: { packages: {} }, isThere: everywhere })).toBe(
      'node_modules/zod is missing',
    )
  })
  it('names a package of another version', () => {
    const installed = { packages: { 'node_modules/zod': { ...zod, version: '4.0.0' } } }
    expect(reasonToInstall({ lock, installed, isThere: everywhere })).toBe(
      'node_modules/zod is 4.0.0 and 4.6.7 is wanted',
    )
  })
  it('names a package whose contents are not those of the lock file', () => {
    const installed = { packages: { 'node_modules/zod': { ...zod, integrity: 'sha512-z' } } }
    expect(reasonToInstall({ lock, installed, isThere: everywhere })).toContain('node_modules/zod')
  })
  it('names a package whose folder was deleted by hand', () => {
    const installed = { packages: { 'node_modules/zod': zod } }
    expect(reasonToInstall({ lock, installed, isThere: () => false })).toBe('node_modules/zod is gone')
  })
})

describe('planInstall of Debian packages', () => {
  const asked = {
    packages: ['postgresql'],
    hasApt: true,
    isRoot: false,
    canSudo: false,
    instead: 'set DATABASE_URL',
  }
  const cases = [
    ['does nothing for nothing', { packages: [] }, { action: 'nothing' }],
    ['installs plainly as root', { isRoot: true }, { action: 'install', prefix: [] }],
    [
      'goes through sudo that asks no password',
      { canSudo: true },
      { action: 'install', prefix: ['sudo', '-n'] },
    ],
    [
      'says the command to a user who may not',
      {},
      {
        action: 'refuse',
        sentence:
          'Thinspan needs postgresql: run "sudo apt-get install postgresql" once, or set DATABASE_URL.',
      },
    ],
    [
      'says what is missing where there is no apt',
      { hasApt: false, isRoot: true },
      {
        action: 'refuse',
        sentence: 'Thinspan needs postgresql and finds no apt-get: install it by hand, or set DATABASE_URL.',
      },
    ],
  ] as const
  it.each(cases)('%s', (_, change, plan) => {
    expect(planInstall({ ...asked, ...change })).toEqual(plan)
  })
})
