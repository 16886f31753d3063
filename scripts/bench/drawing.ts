/** `npm run bench -- drawing`: frame times of the stretch view at 2,000 nodes and 10,000 named links, in a real browser. */
import { join, resolve } from 'node:path'
import { build } from 'esbuild'
import { chromium } from 'playwright-core'
import type { StretchInput } from '@/lib/face/stretch'
import { edgesOf } from '@/lib/method/graph'
import { twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity, linkShares } from '@/lib/method/spectrum'
import { findChromium } from '../lib/chromium.mjs'
import { cpuBelowMs } from './drawing/browser-cpu'
import type { Act } from './drawing/page'

const PER_SIDE = 1_000
const DEGREE = 10
const CROSSING = 20
const OFFICES = ['Tarnwick', 'Gullhythe', 'Pinnet Bay', 'Eelholm']

export async function benchDrawing(args: readonly string[], print: (line: string) => void): Promise<void> {
  const frames = args.includes('--quick') ? 20 : 120
  const executablePath = findChromium(process.env)
  if (!executablePath) throw new Error('There is no browser: npm test installs one, or set CHROMIUM_PATH.')
  const root = resolve(import.meta.dirname, '../..')
  const { outputFiles } = await build({
    ...{ absWorkingDir: root, entryPoints: [join(root, 'scripts/bench/drawing/page.tsx')] },
    ...{ bundle: true, format: 'iife', platform: 'browser', write: false, jsx: 'automatic' },
    define: { 'process.env.NODE_ENV': '"production"' },
  })
  const input = overlay()
  print(
    `${input.nodes.length} nodes, ${input.links.length} links, drawn 4800 px wide; ${frames} frames of each`,
  )
  print('                    frame ms: median     p95   CPU per frame, all of the browser, ms')
  const server = await chromium.launchServer({ executablePath, args: ['--no-sandbox'] })
  const browser = await chromium.connect(server.wsEndpoint())
  const cpuMs = () => cpuBelowMs(server.process().pid ?? -1)
  try {
    for (const marks of ['elements', 'paths'] as const) {
      const page = await browser.newPage({ viewport: { width: 1280, height: 900 } })
      await page.setContent(PAGE)
      await page.addScriptTag({ content: outputFiles[0]?.text ?? '' })
      await page.evaluate(([input, marks]) => window.drawingBench.draw(input, marks), [input, marks] as const)
      // Pictures of the still drawing are made before anything is measured.
      await page.evaluate((count) => window.drawingBench.run('still', count), 10)
      for (const act of ACTS) {
        const before = cpuMs()
        const times = await page.evaluate(([act, count]) => window.drawingBench.run(act, count), [
          act,
          frames,
        ] as const)
        const after = cpuMs()
        const cpu = before === null || after === null ? null : (after - before) / frames
        print(
          `${marks.padEnd(9)} ${act.padEnd(6)} ${figure(quantile(times, 0.5), 18)} ${figure(quantile(times, 0.95), 7)} ${cpu === null ? '–' : figure(cpu, 9)}`,
        )
      }
      await page.close()
    }
  } finally {
    await browser.close()
    await server.close()
  }
}

/** Zoom works out the whole layout anew. */
const ACTS: readonly Act[] = ['still', 'pan', 'point', 'zoom']

function figure(value: number, width: number): string {
  return value.toFixed(1).padStart(width)
}

/** Two clusters, as most overlays that need looking at. */
function overlay(): Omit<StretchInput, 'width'> {
  const graph = twoClusters({ perSide: PER_SIDE, degree: DEGREE, links: CROSSING }, createRandom('drawing'))
  const { lambda2, fiedler } = algebraicConnectivity(graph, { count: 2 })
  const scale = Math.sqrt(graph.nodes)
  const name = (node: number) => `n${String(node).padStart(4, '0')}`
  const nodes: StretchInput['nodes'] = Array.from(fiedler, (value, node) => ({
    name: name(node),
    labels: { office: OFFICES[((node * OFFICES.length) / graph.nodes) | 0] ?? '' },
    side: value > 0 ? 'a' : 'b',
    value: value * scale,
    state: 'heard',
    degree: DEGREE,
  }))
  const links: StretchInput['links'] = linkShares(graph, fiedler, lambda2).map(
    ({ source, target, weight, share }) => ({
      ...{ a: name(source), b: name(target), weight, share, state: 'live' as const },
      crossing: source < PER_SIDE !== target < PER_SIDE,
    }),
  )
  if (links.length !== edgesOf(graph).length) throw new Error('A link is missing.')
  return { nodes, links, laneKey: 'office', sided: true, crossingLinks: CROSSING, silent: false }
}

function quantile(values: readonly number[], share: number): number {
  const sorted = [...values].sort((a, b) => a - b)
  return sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] ?? Number.NaN
}

/** The sheet's colours and the few classes that the drawing is painted by; what the product's style sheet has besides is no matter here. */
const PAGE = `<!doctype html><meta charset="utf-8"><style>
:root { --sheet: #fbf8f0; --ink: #1a2130; --faint: #d8cfbb; --hairline: #d9d0bf; --side-a: #285796; --side-b: #85316b }
body { margin: 0; background: var(--sheet); color: var(--ink) }
.scroller { width: 1200px; overflow-x: auto; overflow-y: hidden }
.relative { position: relative } .absolute { position: absolute } .top-0 { top: 0 } .left-0 { left: 0 } .block { display: block }
[class~="stroke-(--faint)"] { stroke: var(--faint) } .stroke-ink { stroke: var(--ink) } .stroke-hairline { stroke: var(--hairline) }
.text-side-a { color: var(--side-a) } .text-side-b { color: var(--side-b) } .text-ink { color: var(--ink) }
.fill-ink { fill: var(--ink) } .fill-sheet { fill: var(--sheet) } .pointer-events-none { pointer-events: none }
</style><body></body>`
