import { AsyncLocalStorage } from 'node:async_hooks'

type Storage = AsyncLocalStorage<unknown>

/**
 * From the first `run` on, an AsyncLocalStorage of Node 20 has hooks called at every promise of the process, and the ORM has two
 * of them, for transactions and for flushes. Where the process is to be quick between those, each storage is switched off
 * once the last of its runs is over. What a run leaves going after the promise that it returned finds no store: the ORM's
 * runs leave nothing. A storage that is entered without a run stays on.
 */
export function switchOffIdleStorages(prototype: Storage = AsyncLocalStorage.prototype): void {
  const { run } = prototype
  const underWay = new WeakMap<Storage, number>()
  prototype.run = function <R, A extends unknown[]>(
    this: Storage,
    store: unknown,
    callback: (...args: A) => R,
    ...args: A
  ): R {
    const over = () => {
      const left = (underWay.get(this) ?? 1) - 1
      underWay.set(this, left)
      if (left === 0) this.disable()
    }
    underWay.set(this, (underWay.get(this) ?? 0) + 1)
    let result: R | undefined
    try {
      result = run.call(this, store, () => callback(...args)) as R
      return result
    } finally {
      // Only a promise: what else has a `then` may begin its work when it is called.
      if (result instanceof Promise) result.then(over, over)
      else over()
    }
  }
}
