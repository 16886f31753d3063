import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import {
  decodeFrame,
  decodeHello,
  encodeFrame,
  encodeHello,
  encodeProof,
  LINK_VERSIONS,
  linkStatement,
  verifyBytes,
} from '@/lib/protocol'
import { DIALER_KEYS, type LinkVectors, proofBy } from './link-vectors'

const bytesOf = (hex: string): Uint8Array => Uint8Array.from(Buffer.from(hex, 'hex'))
const hexOf = (bytes: Uint8Array): string => Buffer.from(bytes).toString('hex')
const read = (version: number): LinkVectors =>
  JSON.parse(readFileSync(new URL(`data/link-v${version}-vectors.json`, import.meta.url), 'utf8'))

// Written by make-link-vectors.ts while the version was the newest; agents of that age say exactly these bytes.
describe.each([1, 2])('the link protocol, version %i', (version) => {
  const vectors = read(version)

  test('is spoken still', () => {
    expect(LINK_VERSIONS).toContain(version)
  })

  test.each(vectors.frames.map(({ about, frame, hex }) => [about, frame, hex] as const))(
    '%s: the same bytes, the same frame',
    (_, frame, hex) => {
      expect(hexOf(encodeFrame(frame, version))).toBe(hex)
      expect(decodeFrame(bytesOf(hex), { version })).toEqual({ ok: true, frame })
    },
  )

  test('hello, what both ends sign, and the proof are as they were', () => {
    const { dialer, listener } = vectors.hellos
    for (const { hello, hex } of [dialer, listener]) {
      expect(decodeHello(bytesOf(hex))).toEqual(hello)
      expect(hexOf(encodeHello(hello))).toBe(hex)
    }
    const hellos = [bytesOf(dialer.hex), bytesOf(listener.hex)] as const
    const statement = linkStatement('dialer', ...hellos)
    expect(hexOf(statement)).toBe(vectors.statements.dialer)
    expect(hexOf(linkStatement('listener', ...hellos))).toBe(vectors.statements.listener)
    expect(hexOf(encodeProof(proofBy(DIALER_KEYS, statement)))).toBe(vectors.proof)
    expect(verifyBytes(DIALER_KEYS.publicKey, statement, bytesOf(vectors.proof).subarray(1))).toBe(true)
  })
})
