import { readFileSync, writeFileSync } from 'node:fs'
import { parseArgs } from 'node:util'
import { median } from '@/lib/warn/stats/median'
import { allAtOnce } from './warning/all-at-once'
import { calibration, type Forecast, printCalibration } from './warning/calibration'
import { healthyDays, thinning } from './warning/courses'
import { incidentsOf } from './warning/incidents'
import { deviation, fitNoise, type NoiseModel, noiseSchema, ratios } from './warning/noise'
import { healthyOverlays, thinningOverlays } from './warning/overlays'
import { type WalkerRun, walkerHours } from './warning/walker-hours'

type Print = (line: string) => void

const NOISE_FILE = `${import.meta.dirname}/warning/noise.json`
const WARNED_BEFORE_MS = 15 * 60_000
/** Hours of the day at which walkers begin: the rolling restart is among them. */
const START_HOURS = [8.5, 0, 14, 19]

/**
 * `npm run bench -- warning [--days 200] [--runs 20] [--quick] [--walkers HOURS]`: what the default rules say of healthy days, and how
 * long before the end they say that links thin. A surrogate: the exact λ₂ of the graph with the noise of readings, fitted to
 * simulated walkers. `--walkers` fits it anew to so many hours (a minute or more each) and holds half of them out.
 */
export function benchWarning(args: readonly string[], print: Print): void {
  const { values } = parseArgs({
    args: [...args],
    options: {
      days: { type: 'string', default: '200' },
      runs: { type: 'string', default: '20' },
      quick: { type: 'boolean', default: false },
      walkers: { type: 'string' },
    },
  })
  if (values.walkers !== undefined) fit(Number(values.walkers), print)
  const noise = noiseSchema.parse(JSON.parse(readFileSync(NOISE_FILE, 'utf8')))
  print(
    `Surrogate: exact λ₂ with noise fitted to ${noise.walkerHours.toFixed(1)} simulated hours of walkers: ${JSON.stringify(noise)}`,
  )
  falseAlarms(values.quick ? 20 : Number(values.days), noise, print)
  detection(values.quick ? 3 : Number(values.runs), noise, print)
  foretold(values.quick ? 1 : 5, noise, print)
  notForeseeable(values.quick ? 1 : 5, print)
}

function fit(hours: number, print: Print): void {
  const overlays = healthyOverlays()
  const runs = [0, 1].flatMap((round) =>
    overlays.map(({ name, graph }, index) => {
      const startHour = START_HOURS[(index + round) % START_HOURS.length]!
      return walkerHours(graph, {
        hours: hours / (2 * overlays.length),
        startHour,
        seed: `${round} ${name}`,
      })
    }),
  )
  const noise = fitNoise(runs.slice(0, overlays.length).map(({ samples }) => samples))
  writeFileSync(NOISE_FILE, `${JSON.stringify(noise, null, 2)}\n`)
  printHeldOut(runs.slice(overlays.length), noise, print)
  for (const [index, { facts }] of runs.entries()) {
    const rules = incidentsOf(facts).map((incident) => incident.rules.join(' and '))
    print(
      `Walkers themselves, ${overlays[index % overlays.length]!.name}, ${(hours / runs.length).toFixed(1)} h: false incidents ${rules.length}${rules.length > 0 ? `: ${rules.join('; ')}` : ''}`,
    )
  }
}

function printHeldOut(heldOut: readonly WalkerRun[], noise: NoiseModel, print: Print): void {
  const runs = heldOut.map(({ samples }) => samples)
  const held = fitNoise(runs)
  print(
    `Held-out walkers, ${held.walkerHours.toFixed(1)} h: spread ${deviation(runs.flatMap((run) => ratios(run, noise.lagSamples))).toFixed(3)} beside ${noise.spread.toFixed(3)}, φ ${held.phi.toFixed(2)} beside ${noise.phi.toFixed(2)}, settling ${held.settlingSamples} beside ${noise.settlingSamples} samples.`,
  )
}

function falseAlarms(days: number, noise: NoiseModel, print: Print): void {
  print('')
  print(`Healthy life under the default rules, ${days} overlay-days: false incidents.`)
  const overlays = healthyOverlays()
  let all = 0
  for (const { name, graph } of overlays) {
    const incidents = incidentsOf(
      healthyDays(graph, days / overlays.length, { noise, seed: `healthy ${name}` }),
    )
    all += incidents.length
    const rules = [...new Set(incidents.flatMap((incident) => incident.rules))].join(', ')
    print(
      `${name.padEnd(34)} ${String(days / overlays.length).padStart(4)} days ${String(incidents.length).padStart(4)}  ${rules}`,
    )
  }
  print(`In all ${all} in ${days} days; at most 2 in 200 are wanted.`)
}

function detection(runs: number, noise: NoiseModel, print: Print): void {
  print('')
  print(
    `Links thin one by one, ${runs} runs each: warned 15 min before the last goes and while more than one is left;`,
  )
  print(
    'median minutes from the first warning to the last link; runs already in a false incident when it began.',
  )
  const overlays = thinningOverlays()
  let ok = 0
  let all = 0
  for (const hours of [1, 6, 48])
    for (const overlay of overlays) {
      const results = Array.from({ length: runs }, (_, run) => warnedIn(overlay, hours, noise, run))
      const inTime = results.filter(({ isInTime }) => isInTime).length
      ok += inTime
      all += runs
      const lead = median(results.map(({ leadMinutes }) => leadMinutes))
      const before = results.filter(({ wasRaised }) => wasRaised).length
      print(
        `${`${hours} h`.padStart(5)} ${overlay.name.padEnd(34)} ${inTime}/${runs}  lead ${lead.toFixed(0).padStart(5)} min  before ${before}`,
      )
    }
  print(`In time: ${ok} of ${all}, ${((100 * ok) / all).toFixed(1)} %; 95 % are wanted.`)
}

function warnedIn(
  overlay: ReturnType<typeof thinningOverlays>[number],
  hours: number,
  noise: NoiseModel,
  run: number,
): { isInTime: boolean; leadMinutes: number; wasRaised: boolean } {
  const { facts, beganAtMs, oneLeftAtMs, lastGoneAtMs } = thinning(overlay, hours, {
    noise,
    seed: `${overlay.name} ${hours} ${run}`,
  })
  const incidents = incidentsOf(facts)
  // What was raised before the thinning began warned of nothing.
  const first = incidents.find(({ raisedAtMs }) => raisedAtMs >= beganAtMs)
  const raisedAtMs = first?.raisedAtMs ?? Number.POSITIVE_INFINITY
  return {
    isInTime: raisedAtMs <= Math.min(lastGoneAtMs - WARNED_BEFORE_MS, oneLeftAtMs),
    leadMinutes: Math.max(0, (lastGoneAtMs - raisedAtMs) / 60_000),
    wasRaised: incidents.some((one) => one.raisedAtMs < beganAtMs && one.clearedAtMs > beganAtMs),
  }
}

function foretold(runs: number, noise: NoiseModel, print: Print): void {
  print('')
  print(
    `Forecasts of falling rules while links thin over 6 or 48 hours, ${runs} runs each: how often the floor was reached within the hours asked for.`,
  )
  const forecasts: Forecast[] = thinningOverlays().flatMap((overlay) =>
    [6, 48].flatMap((hours) =>
      Array.from({ length: runs }, (_, run) =>
        calibration(thinning(overlay, hours, { noise, seed: `forecast ${overlay.name} ${hours} ${run}` })),
      ).flat(),
    ),
  )
  printCalibration(forecasts, print)
}

function notForeseeable(runs: number, print: Print): void {
  print('')
  print(
    `All links between two clusters lost at once, walkers, ${runs} runs each: not foreseeable. Seconds until a reading says so, and until people are told.`,
  )
  for (const overlay of thinningOverlays())
    for (const silent of [false, true]) {
      const seen = Array.from({ length: runs }, (_, run) => allAtOnce(overlay, { silent, seed: `${run}` }))
      const said = seen.map(({ saidSeconds }) => saidSeconds)
      const told = seen.map(({ seconds }) => seconds)
      const rules = [...new Set(seen.map(({ rule }) => rule))].join(', ')
      print(
        `${overlay.name.padEnd(34)} ${silent ? 'one side silent' : 'both sides heard'}  said ${median(said).toFixed(0).padStart(3)} (most ${Math.max(...said).toFixed(0)})  told ${median(told).toFixed(0).padStart(3)} (most ${Math.max(...told).toFixed(0)})  by ${rules}`,
      )
    }
}
