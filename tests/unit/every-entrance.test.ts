import { readdirSync, readFileSync } from 'node:fs'
import { join, relative } from 'node:path'
import { describe, expect, it, vi } from 'vitest'
import { PERMISSIONS } from '@/lib/auth/permissions'

// The first import loads the database library, which takes its time on a busy machine.
vi.setConfig({ testTimeout: 60_000 })

const root = join(import.meta.dirname, '../..')
const METHODS = ['GET', 'HEAD', 'POST', 'PUT', 'PATCH', 'DELETE', 'OPTIONS']

function filesUnder(folder: string): string[] {
  return readdirSync(join(root, folder), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile() && /\.tsx?$/.test(entry.name))
    .map((entry) => join(entry.parentPath, entry.name))
}
const name = (file: string) => relative(root, file)
const sources = ['app', 'lib', 'components']
  .flatMap(filesUnder)
  .map((file) => ({ file, text: readFileSync(file, 'utf8') }))

const permissionOf = (value: unknown): unknown =>
  typeof value === 'function' && 'permission' in value ? value.permission : undefined

describe('every way in', () => {
  const routes = sources.filter(({ file }) => /\/app\/.*\/route\.tsx?$/.test(file))
  const actionModules = sources.filter(({ text }) => /^(['"])use server\1/m.test(text))

  it('is found', () => {
    expect(routes.map(({ file }) => name(file))).toContain('app/api/v1/overlays/route.ts')
    expect(actionModules.map(({ file }) => name(file))).toContain('app/(console)/team/actions.ts')
  })

  it.each(routes.map(({ file }) => [name(file), file]))(
    '%s: each method names its row of the permission table',
    async (_name, file) => {
      const module: Record<string, unknown> = await import(file)
      const methods = METHODS.filter((method) => method in module)
      expect(methods).not.toEqual([])
      for (const method of methods)
        expect(Object.keys(PERMISSIONS), method).toContain(permissionOf(module[method]))
    },
  )

  it.each(actionModules.map(({ file }) => [name(file), file]))(
    '%s: each action names its row of the permission table',
    async (_name, file) => {
      const module: Record<string, unknown> = await import(file)
      expect(Object.keys(module)).not.toEqual([])
      for (const [exported, value] of Object.entries(module))
        expect(Object.keys(PERMISSIONS), exported).toContain(permissionOf(value))
    },
  )

  it('stands in a module of its own: no action is hidden inside a component', () => {
    const hidden = sources.filter(({ text }) => /^[ \t]+(['"])use server\1/m.test(text))
    expect(hidden.map(({ file }) => name(file))).toEqual([])
  })
})

describe('what only one file may do', () => {
  const importing = (pattern: RegExp) =>
    sources.filter(({ text }) => pattern.test(text)).map(({ file }) => name(file))

  it('is knowing the session library', () =>
    expect(importing(/from 'lucia'/)).toEqual(['lib/auth/session.ts']))
  it('is hashing passwords', () =>
    expect(importing(/from '@node-rs\/argon2'/)).toEqual(['lib/auth/password.ts']))
})
