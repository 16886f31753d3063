import { expect, test } from 'vitest'
import { generateKeys, publicKeyFromRaw, signText, verifyText } from '@/lib/protocol'

test('each of more keys than are kept verifies its own signatures and no others', () => {
  const pairs = Array.from({ length: 100 }, generateKeys)
  for (const [index, { privateKey, publicKey }] of pairs.entries()) {
    const signature = signText(privateKey, 'Tarnwick')
    const other = pairs[(index + 1) % pairs.length]!
    expect([
      verifyText(publicKey, 'Tarnwick', signature),
      verifyText(other.publicKey, 'Tarnwick', signature),
    ]).toEqual([true, false])
  }
})

test('what is no key is none, however often it is asked about', () => {
  for (let time = 0; time < 2; time++) expect(publicKeyFromRaw('A'.repeat(42))).toBeNull()
})
