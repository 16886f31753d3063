import { spawnSync } from 'node:child_process'
import { existsSync } from 'node:fs'
import {
  buildLines,
  type CollectorPlace,
  collectorAddress,
  collectorLine,
  type Joint,
  jointLine,
  type LabPlan,
  linkAddress,
  namespaceOf,
  removalLines,
  switchOf,
} from './plan'

/** Why there can be no namespaces here, in one line; null where there can. */
export function whyNoNamespaces(): string | null {
  if (process.platform !== 'linux') return 'network namespaces are a part of Linux'
  if (process.getuid?.() !== 0) return 'network namespaces need root: run the tests as root'
  if (spawnSync('ip', ['-Version']).status !== 0)
    return 'there is no ip command: install iproute2 (apt-get install iproute2)'
  const name = `thinspan-try-${process.pid}`
  const made = spawnSync('ip', ['netns', 'add', name], { encoding: 'utf8' })
  if (made.status !== 0)
    return `this machine makes no network namespaces (a container without CAP_SYS_ADMIN?): ${made.stderr.trim()}`
  spawnSync('ip', ['netns', 'del', name])
  return null
}

/** Of runs that were killed: their agents, then their namespaces. The prefix says which process made them. */
function removeLeftBehind(): void {
  const { stdout } = spawnSync('ip', ['netns', 'list'], { encoding: 'utf8' })
  for (const line of stdout.split('\n')) {
    const [, namespace, pid] = /^(ts([0-9a-z]+)-\S+)/.exec(line) ?? []
    if (!namespace || !pid || existsSync(`/proc/${Number.parseInt(pid, 36)}`)) continue
    const { stdout: inside } = spawnSync('ip', ['netns', 'pids', namespace], { encoding: 'utf8' })
    for (const id of inside.split('\n').filter(Boolean)) process.kill(Number(id), 'SIGKILL')
    spawnSync('ip', ['netns', 'del', namespace])
  }
}

/** Namespaces, bridges and cables of one run; all gone after `remove`, and with the process at the latest. */
export class NamespaceLab {
  readonly plan: LabPlan
  readonly #removeAtExit = () => this.#remove()

  constructor(halves: LabPlan['halves']) {
    const { pid } = process
    this.plan = { prefix: `ts${pid.toString(36)}`, subnet: pid % 250, halves }
  }

  build(): void {
    removeLeftBehind()
    process.once('exit', this.#removeAtExit)
    for (const { namespace, lines } of buildLines(this.plan)) this.#run(namespace, lines)
  }

  remove(): void {
    this.#remove()
    process.off('exit', this.#removeAtExit)
  }

  get collectorHost(): string {
    return collectorAddress(this.plan)
  }

  plugCollector(place: CollectorPlace): void {
    this.#run(switchOf(this.plan), [collectorLine(place)])
  }

  cut(...joints: readonly Joint[]): void {
    this.#run(
      switchOf(this.plan),
      joints.map((joint) => jointLine(joint, 'down')),
    )
  }

  join(...joints: readonly Joint[]): void {
    this.#run(
      switchOf(this.plan),
      joints.map((joint) => jointLine(joint, 'up')),
    )
  }

  /** One node's cable for links. */
  setLinks(node: string, state: 'up' | 'down'): void {
    this.#run(namespaceOf(this.plan, node), [`link set links ${state}`])
  }

  linkAddress(node: string): string {
    return linkAddress(this.plan, node)
  }

  /** A command and its arguments that run a program in a node's namespace. */
  inside(node: string, program: readonly string[]): [string, string[]] {
    return ['ip', ['netns', 'exec', namespaceOf(this.plan, node), ...program]]
  }

  #run(namespace: string | null, lines: readonly string[]): void {
    const where = namespace === null ? [] : ['-netns', namespace]
    const { status, stderr } = spawnSync('ip', [...where, '-batch', '-'], {
      input: `${lines.join('\n')}\n`,
      encoding: 'utf8',
    })
    if (status !== 0) throw new Error(`ip ${where.join(' ')}: ${stderr}`)
  }

  /** What is not there any more, or never was, does not keep the rest. */
  #remove(): void {
    spawnSync('ip', ['-force', '-batch', '-'], { input: `${removalLines(this.plan).join('\n')}\n` })
  }
}
