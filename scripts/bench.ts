/** `npm run bench -- NAME [ARG …]`. Composition root. */
import { benchMethod } from './bench/method'

const BENCHES: Record<string, (args: readonly string[], print: (line: string) => void) => void> = {
  method: benchMethod,
}

const [name, ...args] = process.argv.slice(2)
const bench = name === undefined ? undefined : BENCHES[name]
if (bench) bench(args, (line) => process.stdout.write(`${line}\n`))
else {
  process.stderr.write(`Name a bench: ${Object.keys(BENCHES).join(', ')}.\n`)
  process.exitCode = 2
}
