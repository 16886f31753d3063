import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { z } from 'zod'
import { within } from '../until'
import { Child } from './child'

const answerSchema = z.looseObject({ ok: z.boolean(), command: z.string(), error: z.string().optional() })
const exactSchema = z.looseObject({ lambda2: z.number(), nodes: z.number(), links: z.number() })

export interface FleetProcessInit {
  collector: string
  code: string
  /** `source,target` per line. */
  edgesCsv: string
  /** `name,label,…` with a header. */
  nodesCsv: string
}

/** `npm run fleet` as an operator has it: a process of its own, told what to do line by line. */
export class FleetProcess {
  readonly #child: Child
  readonly #folder: string
  readonly #answers: string[] = []
  #wake: () => void = () => {}

  private constructor(folder: string, { collector, code }: FleetProcessInit) {
    this.#folder = folder
    const options = {
      topology: join(folder, 'edges.csv'),
      labels: join(folder, 'nodes.csv'),
      collector,
      code,
    }
    const flags = Object.entries(options).flatMap(([name, value]) => [`--${name}`, value])
    this.#child = new Child(process.execPath, ['--import', 'tsx', 'scripts/fleet.ts', ...flags, '--quiet'], {
      onLine: (line) => {
        this.#answers.push(line)
        this.#wake()
      },
    })
  }

  /** Resolves once all agents have enrolled and all links stand. */
  static async start(init: FleetProcessInit): Promise<FleetProcess> {
    const folder = await mkdtemp(join(tmpdir(), 'thinspan-fleet-'))
    await writeFile(join(folder, 'edges.csv'), init.edgesCsv)
    await writeFile(join(folder, 'nodes.csv'), init.nodesCsv)
    const fleet = new FleetProcess(folder, init)
    try {
      await fleet.#answer('ready')
    } catch (error) {
      await fleet.stop()
      throw error
    }
    return fleet
  }

  /** Obeyed in full before it resolves. @throws where the fleet says that it cannot */
  async tell(line: string): Promise<object> {
    this.#child.write(line)
    return this.#answer(line.split(' ')[0] ?? line)
  }

  /** All at once, so that hardly any time passes between the first and the last. */
  async tellAll(lines: readonly string[]): Promise<void> {
    this.#child.write(lines.join('\n'))
    for (const line of lines) await this.#answer(line.split(' ')[0] ?? line)
  }

  async exact(): Promise<z.infer<typeof exactSchema>> {
    return exactSchema.parse(await this.tell('exact'))
  }

  async stop(): Promise<void> {
    await this.#child.stop()
    await rm(this.#folder, { recursive: true, force: true })
  }

  async #answer(command: string): Promise<object> {
    while (this.#answers.length === 0) {
      const woken = new Promise<null>((resolve) => {
        this.#wake = () => resolve(null)
      })
      const end = await within(`the fleet answers "${command}"`, Promise.race([woken, this.#child.end]), {
        explain: () => this.#child.tail(),
      })
      if (end !== null && this.#answers.length === 0)
        throw new Error(`The fleet ${end} instead of answering "${command}".\n${this.#child.tail()}`)
    }
    const answer = answerSchema.parse(JSON.parse(this.#answers.shift() ?? ''))
    if (!answer.ok || answer.command !== command)
      throw new Error(`To "${command}" the fleet said ${JSON.stringify(answer)}`)
    return answer
  }
}
