/** `npm run bench -- NAME [ARG …]`. Composition root. */
import { benchAgent } from './bench/agent'
import { benchCoverage } from './bench/coverage'
import { benchDrawing } from './bench/drawing'
import { benchIngest } from './bench/ingest'
import { benchLeak } from './bench/leak'
import { benchReading } from './bench/reading'
import { benchRehearsal } from './bench/rehearsal'
import { benchScale } from './bench/scale'
import { benchWarning } from './bench/warning'

type Bench = (args: readonly string[], print: (line: string) => void) => void | Promise<void>

const BENCHES: Record<string, Bench> = {
  agent: benchAgent,
  coverage: benchCoverage,
  drawing: benchDrawing,
  ingest: benchIngest,
  leak: benchLeak,
  // From cold and at rest: the reading's table begins with what the method alone does.
  method: benchReading,
  reading: benchReading,
  rehearsal: benchRehearsal,
  scale: benchScale,
  warning: benchWarning,
}

const [name, ...args] = process.argv.slice(2)
const bench = name === undefined ? undefined : BENCHES[name]
if (bench) await bench(args, (line) => process.stdout.write(`${line}\n`))
else {
  process.stderr.write(`Name a bench: ${Object.keys(BENCHES).join(', ')}.\n`)
  process.exitCode = 2
}
