const { subtle } = globalThis.crypto
let running = 0

/** What is counted goes to other threads, and is over whenever those have had their turn. */
function counted<A extends unknown[], R>(run: (...args: A) => Promise<R>): (...args: A) => Promise<R> {
  return (...args) => {
    running += 1
    return run(...args).finally(() => {
      running -= 1
    })
  }
}
subtle.sign = counted(subtle.sign.bind(subtle))
subtle.verify = counted(subtle.verify.bind(subtle))

/** Resolves once no signature is being made or judged, and what followed from those is done. */
export async function cryptoAtRest(): Promise<void> {
  do {
    await nextTurn()
    await nextTurn()
  } while (running > 0)
}

function nextTurn(): Promise<void> {
  return new Promise((resolve) => setImmediate(resolve))
}
