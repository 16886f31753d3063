/** `npm run soak -- NAME`: the runs too long for every change. Composition root. */
import { spawn } from 'node:child_process'
import { join, resolve } from 'node:path'

interface Soak {
  about: string
  file: string
  env: Record<string, string>
}

const SOAKS: Record<string, Soak> = {
  audit: {
    about: 'walker audit over 2,000 random histories of the real link code',
    file: 'tests/property/walker-audit.test.ts',
    env: { THINSPAN_AUDIT_RUNS: '2000' },
  },
  course: {
    about:
      'six simulated hours (THINSPAN_SOAK_HOURS) of restarts, flapping links and lost reports on four graphs',
    file: 'tests/soak/course.test.ts',
    env: {},
  },
  fuzz: {
    about:
      '120,000 (THINSPAN_FUZZ_MESSAGES) random and mutated frames and handshakes at an agent with an honest neighbour',
    file: 'tests/soak/fuzz.test.ts',
    env: {},
  },
  faults: {
    about:
      'links, clocks, processes and disks that fail, a minute each, with the walker audit; about 8 minutes',
    file: 'tests/soak/faults.test.ts',
    env: {},
  },
  happenings: {
    about:
      'what happens to overlays: churn, restarts, silence, splits, merges, shapes, 2,000 and 10,000 nodes, with a table',
    file: 'tests/soak/happenings.test.ts',
    env: {},
  },
  handover: {
    about:
      'twelve times (THINSPAN_SOAK_HANDOVERS) a leading collector is killed, stopped, or stopped in the middle of a round, with a table',
    file: 'tests/soak/handover.test.ts',
    env: {},
  },
  kills: {
    about:
      'fifteen times (THINSPAN_SOAK_KILLS) the collector, and then the database, is killed with reports of forty agents under way',
    file: 'tests/soak/kills.test.ts',
    env: {},
  },
  interval: {
    about:
      'the 90 % interval, settling and what it foretells, over 208 (16 per graph: THINSPAN_SOAK_RUNS) simulated overlays under churn, with a table',
    file: 'tests/soak/interval.test.ts',
    env: {},
  },
  liars: {
    about:
      'every lie at three places, and 30 simulated minutes (THINSPAN_SOAK_MINUTES) of honest trouble on five graphs, with a table',
    file: 'tests/soak/liars.test.ts',
    env: {},
  },
  namespaces: {
    about:
      'twelve agents in network namespaces, the collector outside and inside each half; root and iproute2',
    file: 'tests/soak/namespaces.test.ts',
    env: {},
  },
  rehearsal: {
    about:
      'rehearsals on eight simulated overlays, four drains each, twice (THINSPAN_SOAK_RUNS), against the exact λ₂ of what remains, with a table',
    file: 'tests/soak/rehearsal.test.ts',
    env: {},
  },
  'rehearsal-fleets': {
    about: 'rehearsals of two fleets over WebSocket at brisk pace, four drains each, with a table',
    file: 'tests/soak/rehearsal-fleets.test.ts',
    env: {},
  },
  'silent-neighbours': {
    about:
      '1, 10 and 33 % of 60 simulated agents silent for two minutes, with 5 to 30 % of requests lost, named and sealed, twice (THINSPAN_SOAK_RUNS), with a table',
    file: 'tests/soak/silent-neighbours.test.ts',
    env: {},
  },
  year: {
    about:
      'a year of 20 overlays of 200 nodes (THINSPAN_YEAR_OVERLAYS, THINSPAN_YEAR_NODES) rolled up, thinned and looked at, with figures; some 20 GB of disk',
    file: 'tests/soak/year.test.ts',
    env: {},
  },
}

const root = resolve(import.meta.dirname, '..')
const name = process.argv[2]
const soak = name === undefined ? undefined : SOAKS[name]
if (soak) {
  const vitest = join(root, 'node_modules/vitest/vitest.mjs')
  const child = spawn(process.execPath, [vitest, 'run', soak.file], {
    cwd: root,
    stdio: 'inherit',
    env: { ...process.env, THINSPAN_SOAK: 'yes', ...soak.env },
  })
  child.on('exit', (code) => {
    process.exitCode = code ?? 1
  })
} else {
  const list = Object.entries(SOAKS).map(([key, { about }]) => `  ${key.padEnd(10)} ${about}`)
  process.stderr.write(`Name a soak:\n${list.join('\n')}\n`)
  process.exitCode = 2
}
