import { describe, expect, test } from 'vitest'
import { COMMANDS, FLAG_NAMES } from '@/agent/command/flags'
import { HELP } from '@/agent/command/help'
import { type OptionsComponents, readOptions } from '@/agent/command/options'
import { readListen } from '@/agent/command/values'

const nothing = {
  collector: null,
  code: null,
  name: null,
  listen: null,
  address: null,
  labels: {},
  config: 'thinspan-agent.json',
  neighbours: [],
  node: null,
  source: null,
  agentsAt: null,
  listenMetrics: null,
  spool: null,
  tls: null,
  upgrades: null,
  enrolIfNeeded: false,
  json: false,
  yes: false,
  reason: '',
}

const files: Record<string, string> = {
  '/etc/thinspan/code': 'tsj_from-a-file\n',
  '/etc/thinspan/labels': '# of this rack\noffice = Tarnwick\n\nrack=3\n',
}
const machine = (env: Record<string, string> = {}): OptionsComponents => ({
  env,
  hostname: () => 'tar-01.harbourline.example',
  readFile: (path) => {
    const text = files[path]
    if (text === undefined) throw new Error(`no file ${path}`)
    return text
  },
})

describe('the agent’s command line', () => {
  test('all flags of enrol', () => {
    const args = [
      ...[
        'enrol',
        '--collector',
        'https://thinspan.harbourline.example',
        '--code',
        'abc',
        '--name',
        'tar-01',
      ],
      ...[
        '--listen',
        '10.0.0.7:4711',
        '--address',
        'wss://tar-01.example/links',
        '--label',
        'office=Tarnwick',
      ],
      ...[
        '--label',
        'note=a=b',
        '--neighbour',
        'ws://gul-04.example:4711',
        '--config',
        '/etc/thinspan/agent.json',
      ],
    ]
    expect(readOptions(args, machine())).toEqual({
      ok: true,
      command: 'enrol',
      options: {
        ...nothing,
        collector: 'https://thinspan.harbourline.example',
        code: 'abc',
        name: 'tar-01',
        listen: { host: '10.0.0.7', port: 4711 },
        address: 'wss://tar-01.example/links',
        labels: { office: 'Tarnwick', note: 'a=b' },
        config: '/etc/thinspan/agent.json',
        neighbours: ['ws://gul-04.example:4711'],
      },
    })
  })

  test('variables stand in for flags, and flags win', () => {
    const env = {
      THINSPAN_CONFIG: 'env.json',
      THINSPAN_NEIGHBOURS: 'ws://a.example:1,ws://b.example:2',
      THINSPAN_LABELS: 'office=Eelholm,rack=3',
      THINSPAN_LISTEN: ':4711',
    }
    expect(readOptions(['run', '--config', 'flag.json'], machine(env))).toEqual({
      ok: true,
      command: 'run',
      options: {
        ...nothing,
        config: 'flag.json',
        neighbours: ['ws://a.example:1', 'ws://b.example:2'],
        labels: { office: 'Eelholm', rack: '3' },
        listen: { host: '0.0.0.0', port: 4711 },
      },
    })
  })

  const wrong: [string, string[], RegExp][] = [
    ['an unknown command', ['leap'], /There is no command "leap"/],
    ['an unknown flag', ['run', '--colour', 'grey'], /--colour/],
    ['a word too many', ['run', 'fast'], /"fast" was not expected/],
    ['a label without a value', ['enrol', '--label', 'office'], /key=value/],
    ['a collector that is no address', ['enrol', '--collector', 'thinspan'], /--collector: Give an http/],
    [
      'a neighbour that is no link address',
      ['run', '--neighbour', 'http://x.example'],
      /--neighbour: Give a ws/,
    ],
    ['an option of a variable that is neither', ['run'], /THINSPAN_UPGRADES is yes or no, not "perhaps"/],
    ['a source of no kind', ['run', '--neighbours-from', 'gossip:x'], /is no source/],
    [
      'a path that leads nowhere',
      ['run', '--neighbours-from', 'file:/x', '--neighbours-at', 'a..b'],
      /cannot be followed/,
    ],
    ['a rule that gives no address', ['run', '--agents-at', 'http://{host}'], /--agents-at: .* is no rule/],
    ['a certificate without its key', ['run', '--cert', 'cert.pem'], /--cert and --key go together/],
    ['a file that is not there', ['enrol', '--code-file', '/nowhere'], /--code-file: no file/],
    ['a port that is none', ['run', '--listen', '127.0.0.1:70000'], /host:port/],
  ]
  test.each(wrong)('%s is named', (_, args, issue) => {
    const env: Record<string, string> = String(issue).includes('perhaps')
      ? { THINSPAN_UPGRADES: 'perhaps' }
      : {}
    expect(readOptions(args, machine(env))).toEqual({ ok: false, issue: expect.stringMatching(issue) })
  })

  test('everything of an unattended enrolment comes from variables, files and the host', () => {
    const env = {
      THINSPAN_COLLECTOR: 'https://thinspan.harbourline.example',
      THINSPAN_CODE_FILE: '/etc/thinspan/code',
      THINSPAN_LABELS_FILE: '/etc/thinspan/labels',
      THINSPAN_LABELS: 'rack=4',
      THINSPAN_NODE: 'tar-01:4000',
      THINSPAN_NEIGHBOURS_FROM: 'http://127.0.0.1:8080/peers',
      THINSPAN_NEIGHBOURS_AT: 'peers[].address',
      THINSPAN_NEIGHBOURS_EVERY: '10',
      THINSPAN_AGENTS_AT: 'directory',
      THINSPAN_METRICS: '9200',
      THINSPAN_SPOOL: '/var/lib/thinspan/spool',
      THINSPAN_CA: '/etc/thinspan/ca.pem',
      THINSPAN_UPGRADES: 'yes',
      THINSPAN_ENROL_IF_NEEDED: 'yes',
      // As unit files and containers do with what is not set.
      THINSPAN_ADDRESS: '',
    }
    expect(readOptions(['run'], machine(env))).toEqual({
      ok: true,
      command: 'run',
      options: {
        ...nothing,
        collector: 'https://thinspan.harbourline.example',
        code: 'tsj_from-a-file',
        name: 'tar-01.harbourline.example',
        labels: { office: 'Tarnwick', rack: '4' },
        node: 'tar-01:4000',
        source: { kind: 'http', url: 'http://127.0.0.1:8080/peers', at: 'peers[].address', everySeconds: 10 },
        agentsAt: 'directory',
        listenMetrics: { host: '127.0.0.1', port: 9200, anywhere: false },
        spool: '/var/lib/thinspan/spool',
        tls: { ca: '/etc/thinspan/ca.pem', cert: null, key: null },
        upgrades: true,
        enrolIfNeeded: true,
      },
    })
  })

  test('a joining code’s file is not read by commands that do not enrol', () => {
    const read = readOptions(['status'], machine({ THINSPAN_CODE_FILE: '/gone/since' }))
    expect(read).toMatchObject({ ok: true, options: { code: null, name: null } })
  })

  test('the help names every flag and command', () => {
    for (const word of [...COMMANDS, ...FLAG_NAMES]) expect(HELP).toContain(word)
  })

  test('no command and --help show the help', () => {
    expect(readOptions([], machine())).toEqual({ ok: true, command: 'help' })
    expect(readOptions(['run', '--help'], machine())).toEqual({ ok: true, command: 'help' })
  })

  test.each([
    ['127.0.0.1:0', { host: '127.0.0.1', port: 0 }],
    ['[::1]:4711', { host: '::1', port: 4711 }],
    ['node.example:1', { host: 'node.example', port: 1 }],
  ])('listens at %s', (text, listen) => {
    expect(readListen('--listen', text)).toEqual(listen)
  })
})
