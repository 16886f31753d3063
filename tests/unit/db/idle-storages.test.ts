import { AsyncLocalStorage } from 'node:async_hooks'
import { describe, expect, it, vi } from 'vitest'
import { switchOffIdleStorages } from '@/lib/db/idle-storages'

function quietStorage() {
  class Quiet extends AsyncLocalStorage<unknown> {}
  switchOffIdleStorages(Quiet.prototype)
  const storage = new Quiet()
  return { storage, disable: vi.spyOn(storage, 'disable') }
}

describe('Storages that are switched off while idle', () => {
  it('keep the store of a run until its promise is settled, and are switched off then', async () => {
    const { storage, disable } = quietStorage()
    const seen = storage.run('gul-04', async () => {
      await Promise.resolve()
      expect(disable).not.toHaveBeenCalled()
      return storage.getStore()
    })
    expect(await seen).toBe('gul-04')
    expect(disable).toHaveBeenCalledTimes(1)
    expect(storage.getStore()).toBeUndefined()
  })

  it('wait for the last of several runs, whichever that is', async () => {
    const { storage, disable } = quietStorage()
    const ends: (() => void)[] = []
    const runs = ['tar-01', 'pin-02'].map((name) =>
      storage.run(name, async () => {
        await new Promise<void>((resolve) => ends.push(resolve))
        return storage.getStore()
      }),
    )
    ends[0]?.()
    expect(await runs[0]).toBe('tar-01')
    expect(disable).not.toHaveBeenCalled()
    ends[1]?.()
    expect(await runs[1]).toBe('pin-02')
    expect(disable).toHaveBeenCalledTimes(1)
  })

  it('have the outer store again after a run within a run', async () => {
    const { storage, disable } = quietStorage()
    const seen = await storage.run('outer', async () => {
      const inner = await storage.run('inner', async (name: string) => `${name} ${storage.getStore()}`, 'in')
      return [inner, storage.getStore()]
    })
    expect(seen).toEqual(['in inner', 'outer'])
    expect(disable).toHaveBeenCalledTimes(1)
  })

  it('are switched off after a run that fails, at once or later, and say why as before', async () => {
    const { storage, disable } = quietStorage()
    const fail = () => {
      throw new Error('aground')
    }
    expect(() => storage.run('eel-09', fail)).toThrow('aground')
    await expect(storage.run('eel-09', async () => fail())).rejects.toThrow('aground')
    expect(disable).toHaveBeenCalledTimes(2)
  })

  it('go on after having been switched off', async () => {
    const { storage } = quietStorage()
    storage.run('first', () => undefined)
    expect(storage.run('second', () => storage.getStore())).toBe('second')
  })

  it('do not call what only looks like a promise', () => {
    const { storage } = quietStorage()
    // biome-ignore lint/suspicious/noThenProperty: queries that begin when they are awaited look like this
    const lazy = { then: vi.fn() }
    expect(storage.run('tar-01', () => lazy)).toBe(lazy)
    expect(lazy.then).not.toHaveBeenCalled()
  })
})
