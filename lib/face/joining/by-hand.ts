import { AGENT_PORT, type Command, codeOf, FILE_NAME, type JoiningInput, wrapped } from './types'

/** The served file and whether it arrived whole; without the version the sum could be of another. */
export function downloadCommands({ origin, file }: JoiningInput): Command[] {
  const url = `${origin}/agent/${FILE_NAME}${file ? `?version=${file.version}` : ''}`
  const lines = [`curl -fsSo ${FILE_NAME} '${url}'`]
  if (file) lines.push(`echo '${file.sha256}  ${FILE_NAME}' | sha256sum -c`)
  return [{ id: 'download', label: 'Download and verify', text: lines.join('\n') }]
}

export function byHandCommands(input: JoiningInput): Command[] {
  const agent = `node ${FILE_NAME}`
  const config = '--config NAME.json'
  return [
    ...downloadCommands(input),
    {
      id: 'enrol',
      label: 'Enrol, once beside each node',
      text: wrapped([
        `${agent} enrol`,
        `--collector ${input.origin}`,
        `--code ${codeOf(input)}`,
        '--name NAME',
        `--listen 0.0.0.0:${AGENT_PORT}`,
        `--address ws://HOST:${AGENT_PORT}`,
        `--neighbour ws://PEER:${AGENT_PORT}`,
        config,
      ]),
    },
    { id: 'check', label: 'Check: what would go wrong, a line each', text: `${agent} check ${config}` },
    { id: 'run', label: 'Run, from then on', text: `${agent} run ${config}` },
    { id: 'leave', label: 'Leave, when the node goes for good', text: `${agent} leave --yes ${config}` },
  ]
}

/** The example of embedding, from a copy of this project's folder. */
export function exampleCommands(input: JoiningInput, main: string): Command[] {
  const words = [`THINSPAN_COLLECTOR=${input.origin}`, `THINSPAN_CODE=${codeOf(input)}`, `npx tsx ${main}`]
  return [{ id: 'example', label: 'See it work: three nodes in one process', text: wrapped(words) }]
}

/**
 * Three agents in a ring on one machine: the smallest overlay that has a reading. They run in a subshell:
 * otherwise Ctrl-C would end the wait of an interactive shell and leave the agents.
 */
export function trialCommands(input: JoiningInput): Command[] {
  const address = (n: number) => `127.0.0.1:${AGENT_PORT + n}`
  const enrol = wrapped([
    `node ${FILE_NAME} enrol`,
    `--collector ${input.origin}`,
    `--code ${codeOf(input)}`,
    '--name trial-$n',
    `--listen 127.0.0.1:$((${AGENT_PORT} + n))`,
    '--config trial-$n.json',
  ])
  const run = (n: number) =>
    [
      `node ${FILE_NAME} run --config trial-${n}.json`,
      ...Array.from({ length: n - 1 }, (_, i) => `--neighbour ws://${address(i + 1)}`),
      '&',
    ].join(' ')
  return [
    ...downloadCommands(input),
    { id: 'trial-enrol', label: 'Enrol three', text: `for n in 1 2 3; do ${enrol}\ndone` },
    { id: 'trial-run', label: 'Run them until Ctrl-C', text: `(\n${[1, 2, 3].map(run).join('\n')}\nwait\n)` },
    {
      id: 'trial-leave',
      label: 'Afterwards, take them out again',
      text: `for n in 1 2 3; do node ${FILE_NAME} leave --yes --config trial-$n.json; done`,
    },
  ]
}
