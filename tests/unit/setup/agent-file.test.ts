import { execFileSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join, resolve } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { AGENT_VERSION } from '@/agent/version'
import { buildAgentFile } from '@/scripts/lib/agent-file.mjs'
import { licenceNotices } from '@/scripts/lib/licences.mjs'

const root = resolve(import.meta.dirname, '../../..')
const folder = mkdtempSync(join(tmpdir(), 'thinspan-one-file-'))
const file = join(folder, 'thinspan-agent.mjs')
const said = (...args: string[]) =>
  execFileSync(process.execPath, [file, ...args], {
    cwd: folder,
    encoding: 'utf8',
    env: { ...process.env, THINSPAN_CONFIG: '' },
  })

beforeAll(async () => {
  await buildAgentFile(root, { outFile: file })
})
afterAll(() => rmSync(folder, { recursive: true }))

describe('the one-file agent', () => {
  it('starts in an empty folder, without packages, and says its version and its help', () => {
    expect(said('--version')).toBe(`${AGENT_VERSION}\n`)
    expect(said('help')).toMatch(/^thinspan-agent: the probe/)
  })

  it('is of the package’s version, in its first lines too', () => {
    expect(AGENT_VERSION).toBe(JSON.parse(readFileSync(join(root, 'package.json'), 'utf8')).version)
    expect(readFileSync(file, 'utf8').split('\n').slice(0, 2)).toEqual([
      '#!/usr/bin/env node',
      `/* thinspan-agent ${AGENT_VERSION}`,
    ])
  })

  it('carries the licence of every package in it, and messages in one language', () => {
    const text = readFileSync(file, 'utf8')
    for (const name of ['jose', 'pino', 'ws', 'zod'])
      expect(text).toMatch(new RegExp(`^${name} \\S+ \\(MIT\\)\n  Copyright`, 'm'))
    expect(text).toContain('Permission is hereby granted, free of charge')
    expect(text).not.toContain('Ungültige Eingabe')
    expect(Buffer.byteLength(text)).toBeLessThan(600_000)
  })
})

describe('licence notices', () => {
  const mit = (copyright: string) => `MIT License\n\n${copyright}\n\nYou may\nuse it.\n`
  it('say each copyright, and a text that several share once', () => {
    const packages = [
      { name: 'a', version: '1', license: 'MIT', text: mit('Copyright (c) A') },
      {
        name: 'b',
        version: '2',
        license: 'MIT',
        text: mit('Copyright B and C').replace('You may\nuse', 'You may use'),
      },
      { name: 'c', version: '3', license: 'ISC', text: 'Copyright D\n\nDo as you like. */' },
    ]
    expect(licenceNotices(packages)).toBe(
      [
        'It contains:',
        'a 1 (MIT)\n  Copyright (c) A',
        'b 2 (MIT)\n  Copyright B and C',
        'c 3 (ISC)\n  Copyright D',
        '',
        'MIT: a, b\n\nYou may\nuse it.',
        '',
        'ISC: c\n\nDo as you like. * /',
      ].join('\n'),
    )
  })
})
