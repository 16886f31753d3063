import { describe, expect, test } from 'vitest'
import { readListen, readOptions } from '@/agent/command/options'

const nothing = {
  collector: null,
  code: null,
  name: null,
  listen: null,
  address: null,
  labels: {},
  config: 'thinspan-agent.json',
  neighbours: [],
}

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
    expect(readOptions(args, {})).toEqual({
      ok: true,
      command: 'enrol',
      options: {
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
    expect(readOptions(['run', '--config', 'flag.json'], env)).toEqual({
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
    ['a port that is none', ['run', '--listen', '127.0.0.1:70000'], /host:port/],
  ]
  test.each(wrong)('%s is named', (_, args, issue) => {
    expect(readOptions(args, {})).toEqual({ ok: false, issue: expect.stringMatching(issue) })
  })

  test('no command and --help show the help', () => {
    expect(readOptions([], {})).toEqual({ ok: true, command: 'help' })
    expect(readOptions(['run', '--help'], {})).toEqual({ ok: true, command: 'help' })
  })

  test.each([
    ['127.0.0.1:0', { host: '127.0.0.1', port: 0 }],
    ['[::1]:4711', { host: '::1', port: 4711 }],
    ['node.example:1', { host: 'node.example', port: 1 }],
  ])('listens at %s', (text, listen) => {
    expect(readListen(text)).toEqual({ ok: true, listen })
  })
})
