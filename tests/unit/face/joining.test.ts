import { spawnSync } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { type Options, readOptions } from '@/agent/command/options'
import {
  AGENT_RULES,
  byHandCommands,
  CODE_PLACEHOLDER,
  type Command,
  containerCommands,
  downloadCommands,
  environment,
  type JoiningInput,
  NEIGHBOUR_SOURCES,
  networkNotes,
  onlyThisMachine,
  ownNodeCommands,
  PLACEHOLDERS,
  SERVICE_UNIT,
  serviceCommands,
  serviceUpgradeCommands,
  trialCommands,
  unattendedCommands,
} from '@/lib/face/joining'

const SHA = 'a'.repeat(64)
const input: JoiningInput = {
  origin: 'https://thinspan.harbourline.example',
  code: 'ABCD-EFGH-JKLM',
  file: { version: '0.2.0', sha256: SHA },
  nodeVersion: '20.20.2',
}
const textOf = (commands: readonly Command[], id: string) => commands.find((c) => c.id === id)?.text ?? ''
const filled = (text: string) =>
  text.replaceAll('NAME', 'tar-01').replaceAll('HOST', 'tar-01.example').replaceAll('PEER', 'gul-04.example')

/** What a shell hands to the agent: its words, once for each time it is called. */
function callsOf(text: string): string[][] {
  const agent =
    'node() { for word in "$@"; do printf "%s\\0" "$word"; done; printf "\\n"; }\nhostname() { echo tar-01.example; }\n'
  const { stdout, status } = spawnSync('sh', ['-c', `${agent}${text.replaceAll(/ &$/gm, '')}`], {
    encoding: 'utf8',
  })
  expect(status).toBe(0)
  return stdout
    .split('\n')
    .filter((line) => line !== '')
    .map((line) => line.split('\0').slice(0, -1))
}

const FILES: Record<string, string> = {
  '/etc/thinspan/code': 'ABCD-EFGH-JKLM\n',
  '/etc/thinspan/labels': '# Where it stands\nharbour=Tarnwick\n',
}

function understood(words: readonly string[], env: Record<string, string> = {}) {
  const read = readOptions(words, { env, hostname: () => 'tar-01', readFile: (path) => FILES[path] ?? '' })
  if (!read.ok || !('options' in read)) throw new Error(JSON.stringify(read))
  return read
}

function agentReads(text: string): { command: string; options: Options }[] {
  return callsOf(filled(text)).map(([file, ...words]) => {
    expect(file).toBe('thinspan-agent.mjs')
    return understood(words)
  })
}

describe('joining by hand', () => {
  it('takes the very file that this server serves, or does not run it', () => {
    const fetched = textOf(downloadCommands(input), 'download')
    expect(fetched).toBe(
      `curl -fsSo thinspan-agent.mjs 'https://thinspan.harbourline.example/agent/thinspan-agent.mjs?version=0.2.0'\necho '${SHA}  thinspan-agent.mjs' | sha256sum -c`,
    )
    expect(textOf(downloadCommands({ ...input, file: null }), 'download')).not.toContain('sha256sum')
  })

  it('enrols, checks, runs and leaves exactly as the agent understands it', () => {
    const commands = byHandCommands(input)
    expect(agentReads(textOf(commands, 'enrol'))).toMatchObject([
      {
        command: 'enrol',
        options: {
          collector: 'https://thinspan.harbourline.example',
          code: 'ABCD-EFGH-JKLM',
          name: 'tar-01',
          listen: { host: '0.0.0.0', port: 7600 },
          address: 'ws://tar-01.example:7600',
          neighbours: ['ws://gul-04.example:7600'],
          config: 'tar-01.json',
        },
      },
    ])
    for (const command of ['check', 'run', 'leave'])
      expect(agentReads(textOf(commands, command))).toMatchObject([
        { command, options: { config: 'tar-01.json', yes: command === 'leave' } },
      ])
  })

  it('tries it with three agents that are all linked to each other', () => {
    const commands = trialCommands(input)
    expect(
      agentReads(textOf(commands, 'trial-enrol')).map(({ options }) => [
        options.name,
        options.listen?.port,
        options.config,
      ]),
    ).toEqual([
      ['trial-1', 7601, 'trial-1.json'],
      ['trial-2', 7602, 'trial-2.json'],
      ['trial-3', 7603, 'trial-3.json'],
    ])
    const run = textOf(commands, 'trial-run').replace(/\nwait\n\)$/, '\n)')
    expect(agentReads(run).map(({ options }) => [options.config, ...options.neighbours])).toEqual([
      ['trial-1.json'],
      ['trial-2.json', 'ws://127.0.0.1:7601'],
      ['trial-3.json', 'ws://127.0.0.1:7601', 'ws://127.0.0.1:7602'],
    ])
  })
})

describe('joining as a service', () => {
  const variables = (text: string) =>
    Object.fromEntries(
      text
        .trim()
        .split('\n')
        .map((line) => line.split(/=(.*)/s).slice(0, 2) as [string, string]),
    )

  it('hands the agent its settings in variables that it knows', () => {
    const words = ['run', '--enrol-if-needed']
    expect(SERVICE_UNIT).toContain(`thinspan-agent.mjs ${words.join(' ')}\n`)
    expect(understood(words, variables(filled(environment(input))))).toMatchObject({
      options: {
        collector: 'https://thinspan.harbourline.example',
        code: 'ABCD-EFGH-JKLM',
        name: 'tar-01',
        listen: { host: '0.0.0.0', port: 7600 },
        address: 'ws://tar-01.example:7600',
        neighbours: ['ws://gul-04.example:7600'],
        enrolIfNeeded: true,
      },
    })
  })

  it('has a unit that systemd finds nothing wrong with', ({ skip }) => {
    const folder = mkdtempSync(join(tmpdir(), 'thinspan-unit-'))
    try {
      const unit = join(folder, 'thinspan-agent.service')
      writeFileSync(unit, SERVICE_UNIT.replaceAll('/usr/bin/node', process.execPath))
      const verified = spawnSync('systemd-analyze', ['verify', '--man=no', unit], { encoding: 'utf8' })
      if (verified.error) skip('systemd-analyze is not on this machine')
      expect(`${verified.stdout}${verified.stderr}`).toBe('')
      expect(verified.status).toBe(0)
    } finally {
      rmSync(folder, { recursive: true, force: true })
    }
  })

  it('writes each file with its rights before its secrets', () => {
    const commands = [...serviceCommands(input), ...serviceUpgradeCommands(), ...unattendedCommands(input)]
    const written = commands.flatMap(({ text }) => [
      ...text.matchAll(/^sudo install -D -m (\d+) \/dev\/null (\S+)\nsudo tee \2 > \/dev\/null <</gm),
    ])
    const modes = Object.fromEntries(written.map(([, mode, path]) => [path, mode]))
    expect(modes).toEqual({
      '/etc/thinspan-agent.env': '0600',
      '/etc/thinspan/code': '0600',
      '/etc/thinspan/labels': '0644',
      '/etc/systemd/system/thinspan-agent.service': '0644',
      '/etc/systemd/system/thinspan-agent.service.d/code.conf': '0644',
      '/etc/systemd/system/thinspan-agent.service.d/upgrades.conf': '0644',
    })
  })

  it('gives hundreds of nodes the same settings, under the names of their hosts', () => {
    const commands = unattendedCommands(input)
    const script = textOf(commands, 'unattended-environment').replaceAll(/^sudo .*$/gm, 'cat <<END')
    const settings = spawnSync(
      'sh',
      ['-c', `hostname() { echo tar-01.example; }\n${script.replace('cat <<END\n', '')}`],
      {
        encoding: 'utf8',
      },
    ).stdout
    expect(
      understood(['run', '--enrol-if-needed', '--code-file', '/etc/thinspan/code'], variables(settings)),
    ).toMatchObject({
      options: {
        code: 'ABCD-EFGH-JKLM',
        name: 'tar-01',
        labels: { harbour: 'Tarnwick' },
        address: 'ws://tar-01.example:7600',
        source: { kind: 'file', path: '/etc/thinspan/peers' },
        agentsAt: '7600',
      },
    })
    expect(agentReads(textOf(commands, 'unattended-enrol'))).toMatchObject([
      {
        command: 'enrol',
        options: { code: 'ABCD-EFGH-JKLM', labels: { harbour: 'Tarnwick' }, name: 'tar-01' },
      },
    ])
  })
})

describe('joining in other ways', () => {
  it('checks the file as the image is made, and again for Node.js itself', () => {
    expect(textOf(containerCommands(input), 'containerfile')).toContain(
      `RUN echo '${SHA}  /opt/thinspan-agent.mjs' | sha256sum -c\n`,
    )
    expect(textOf(ownNodeCommands(input), 'own-node')).toContain(
      "grep ' node-v20.20.2-linux-x64.tar.gz$' | sha256sum -c",
    )
  })

  it('knows sources and rules that the agent takes', () => {
    for (const { text } of NEIGHBOUR_SOURCES)
      expect(agentReads(`node thinspan-agent.mjs run ${text}`)[0]?.options.source).not.toBeNull()
    for (const { text } of AGENT_RULES)
      expect(agentReads(`node thinspan-agent.mjs run ${text}`)[0]?.options.agentsAt).not.toBeNull()
  })

  it('explains every word in capitals that has to be filled in', () => {
    const texts = [byHandCommands, trialCommands, serviceCommands, containerCommands, unattendedCommands]
      .flatMap((commands) => commands({ ...input, code: null }))
      .map(({ text }) => text)
    const given = /\b(THINSPAN_\w+|SHASUMS256|END|EPERM|FROM|COPY|RUN|USER|VOLUME|ENTRYPOINT|AF_\w+)\b/g
    const capitals = texts.flatMap((text) => text.replaceAll(given, '').match(/\b[A-Z]{4,}\b/g) ?? [])
    expect([...new Set(capitals)].sort()).toEqual(
      [...PLACEHOLDERS, CODE_PLACEHOLDER].map(({ name }) => name).sort(),
    )
  })

  it('says which port of this server must be reached, and where only this machine can', () => {
    const first = (origin: string) => networkNotes(origin)[0]?.text
    expect([first('http://tide:3000'), first('https://tide'), first('http://tide')]).toEqual([
      expect.stringContaining('TCP 3000,'),
      expect.stringContaining('TCP 443,'),
      expect.stringContaining('TCP 80,'),
    ])
    const origins = [
      'http://localhost:3000',
      'http://127.0.0.1:80',
      'http://[::1]:3',
      'https://thinspan.example',
    ]
    expect(origins.map(onlyThisMachine)).toEqual([true, true, true, false])
  })
})
