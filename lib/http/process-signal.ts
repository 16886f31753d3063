const key = Symbol.for('thinspan.process-signal')
const store = globalThis as { [key]?: AbortController }

/**
 * Aborts when the process is told to end. Streams and long waits close on it: an open event stream would keep
 * the process from ending.
 */
export function processSignal(): AbortSignal {
  return controller().signal
}

export function stopProcess(reason: string): void {
  controller().abort(new Error(`The server is stopping: ${reason}.`))
}

function controller(): AbortController {
  store[key] ??= new AbortController()
  return store[key]
}
