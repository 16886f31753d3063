import { describe, expect, it } from 'vitest'
import { readOptions } from '@/agent/command/options'
import { joiningCommands, onlyThisMachine, PLACEHOLDERS } from '@/lib/face/joining-commands'

/** What a shell makes of the text: lines joined, words split. */
function words(text: string): string[] {
  return text.replaceAll('\\\n', ' ').split(/\s+/)
}

function parsed(id: 'enrol' | 'run') {
  const origin = 'https://thinspan.harbourline.example'
  const command = joiningCommands({ origin, code: 'ABCD-EFGH-JKLM' }).find((c) => c.id === id)
  const filled = (command?.text ?? '')
    .replaceAll('NAME', 'tar-01')
    .replaceAll('HOST', 'tar-01.example')
    .replaceAll('PEER', 'gul-04.example')
  const [npx, tsx, main, ...args] = words(filled)
  expect([npx, tsx, main]).toEqual(['npx', 'tsx', 'agent/main.ts'])
  return readOptions(args, {})
}

describe('commands of the Joining page', () => {
  it('enrols exactly as the agent understands it', () => {
    expect(parsed('enrol')).toMatchObject({
      ok: true,
      command: 'enrol',
      options: {
        collector: 'https://thinspan.harbourline.example',
        code: 'ABCD-EFGH-JKLM',
        name: 'tar-01',
        listen: { host: '0.0.0.0', port: 7600 },
        address: 'ws://tar-01.example:7600',
        config: 'tar-01.json',
      },
    })
  })

  it('runs with the configuration that enrolling wrote', () => {
    expect(parsed('run')).toMatchObject({
      ok: true,
      command: 'run',
      options: { config: 'tar-01.json', neighbours: ['ws://gul-04.example:7600'] },
    })
  })

  it('explains every word in capitals that it uses', () => {
    const text = joiningCommands({ origin: 'http://localhost:3000', code: 'x' })
      .map((c) => c.text)
      .join(' ')
    const capitals = [...new Set(text.match(/\b[A-Z]{4,}\b/g))].sort()
    expect(capitals).toEqual(PLACEHOLDERS.map((p) => p.name).sort())
  })

  it('knows an address that only this machine can reach', () => {
    const origins = [
      'http://localhost:3000',
      'http://127.0.0.1:80',
      'http://[::1]:3',
      'https://thinspan.example',
    ]
    expect(origins.map(onlyThisMachine)).toEqual([true, true, true, false])
  })
})
