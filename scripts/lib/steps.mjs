/** Names each step with its time. A step that returns null had nothing to do and is told only when it was slow. */

const ANNOUNCE_AFTER_MS = 1500
const QUIET_UNDER_MS = 1000

export function formatDuration(ms) {
  if (ms < 59_950) return `${(ms / 1000).toFixed(1)} s`
  const seconds = Math.round(ms / 1000)
  return `${Math.floor(seconds / 60)} min ${seconds % 60} s`
}

export function createSteps({ write, nowMs }) {
  const startedMs = nowMs()
  const line = (text) => write(`${text}\n`)
  return {
    note: (text) => line(`  ${text}`),
    total: () => formatDuration(nowMs() - startedMs),
    /** `work` resolves to what was done, in a few words, or to null. */
    async step(name, work) {
      const beganMs = nowMs()
      const announce = setTimeout(() => line(`… ${name}`), ANNOUNCE_AFTER_MS)
      try {
        const done = await work()
        const tookMs = nowMs() - beganMs
        if (done !== null && done !== undefined) line(`✓ ${name}: ${done} (${formatDuration(tookMs)})`)
        else if (tookMs >= QUIET_UNDER_MS) line(`✓ ${name}: nothing to do (${formatDuration(tookMs)})`)
      } catch (error) {
        line(`✗ ${name} (${formatDuration(nowMs() - beganMs)})`)
        throw error
      } finally {
        clearTimeout(announce)
      }
    },
  }
}
