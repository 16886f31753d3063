import { type BenchOverlay, MEASURED } from './overlay'
import { figuresOf } from './process-figures'

export interface Measured {
  seconds: number
  /** Of one core; and of the warm-up before, in which much is still being compiled. */
  cpuShare: number
  warmUpCpuShare: number
  /** Share of the time in which the agent could have run and the machine had no processor for it. */
  waitedShare: number
  wakesPerSecond: number
  rssMib: number
  peakRssMib: number
  /** Both ways together, per link; null where not counted. */
  bytesPerLinkSecond: number | null
  /** Sizes of the reports' bodies as they crossed the wire, and the largest as JSON. */
  reportBytesMost: number
  reportBytesMean: number
  reportJsonBytesMost: number
  ticksPerSecond: number | null
  /** Share of ticks that came more than a whole tick late. */
  lateShare: number | null
  /** Live links as the agent reported them: the most, the fewest, the mean over the time. */
  links: number
  linksLeast: number
  linksMean: number
  /** Mean agreed weight of the links, as the agent reported it last. */
  meanWeight: number | null
  /** Of light neighbours, on average. */
  lightTicksPerSecond: number | null
  colonies: number
}

/** Lets the overlay warm up, then watches the measured agent. */
export async function measure(overlay: BenchOverlay, warmUpMs: number, ms: number): Promise<Measured> {
  const { proxy, collector, pid } = overlay
  const linked = figuresOf(pid)
  const linkedAtMs = performance.now()
  await delay(warmUpMs)
  const warmUpSeconds = (performance.now() - linkedAtMs) / 1000
  const joined = collector.find(MEASURED)
  const before = figuresOf(pid)
  const healthBefore = joined.last?.report.node.health
  const bytesBefore = proxy.bytesIn + proxy.bytesOut
  const lightBefore = overlay.lightFigures
  const startedAtMs = performance.now()
  joined.reportBytes.length = 0
  let rssMib = 0
  const links: number[] = []
  while (performance.now() - startedAtMs < ms) {
    await delay(Math.min(1_000, ms))
    rssMib = Math.max(rssMib, figuresOf(pid).rssMib)
    links.push(overlay.links)
  }
  const after = figuresOf(pid)
  const seconds = (performance.now() - startedAtMs) / 1000
  const health = joined.last?.report.node.health
  const ticks = health && healthBefore ? health.ticks - healthBefore.ticks : null
  const late = health && healthBefore ? health.ticksLate - healthBefore.ticksLate : null
  const light = overlay.lightFigures
  const ofLight = (figure: 'bytes' | 'ticks') =>
    light && lightBefore ? (light[figure] - lightBefore[figure]) / seconds / light.up : null
  const bytes = proxy.bytesIn + proxy.bytesOut - bytesBefore
  const linksMost = Math.max(...links)
  return {
    seconds,
    cpuShare: (after.cpuSeconds - before.cpuSeconds) / seconds,
    warmUpCpuShare: (before.cpuSeconds - linked.cpuSeconds) / warmUpSeconds,
    waitedShare: (after.waitedSeconds - before.waitedSeconds) / seconds,
    wakesPerSecond: (after.wakes - before.wakes) / seconds,
    rssMib,
    peakRssMib: after.peakRssMib,
    bytesPerLinkSecond: bytes === 0 ? ofLight('bytes') : bytes / seconds / linksMost,
    reportBytesMost: Math.max(...joined.reportBytes.map(({ wire }) => wire)),
    reportBytesMean: joined.reportBytes.reduce((sum, { wire }) => sum + wire, 0) / joined.reportBytes.length,
    reportJsonBytesMost: Math.max(...joined.reportBytes.map(({ plain }) => plain)),
    ticksPerSecond: ticks === null ? null : ticks / seconds,
    lateShare: ticks === null || late === null ? null : late / ticks,
    links: linksMost,
    linksLeast: Math.min(...links),
    linksMean: links.reduce((sum, count) => sum + count, 0) / links.length,
    meanWeight: health?.meanWeight ?? null,
    lightTicksPerSecond: ofLight('ticks'),
    colonies: joined.last?.report.sums.colonies.length ?? 0,
  }
}

const delay = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms))
