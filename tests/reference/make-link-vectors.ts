/**
 * Writes tests/reference/data/link-v1-vectors.json or link-v2-vectors.json: `npx tsx tests/reference/make-link-vectors.ts 2`.
 * Only for a version that has not been given to anyone yet: agents of the last twelve months speak the older ones.
 */
import { writeFileSync } from 'node:fs'
import { encodeFrame, encodeHello, encodeProof, linkStatement } from '@/lib/protocol'
import { DIALER_KEYS, helloOf, type LinkVectors, proofBy, vectorFrames } from './link-vectors'

const version = Number(process.argv[2])
const hex = (bytes: Uint8Array): string => Buffer.from(bytes).toString('hex')
const versions = version === 1 ? [1] : [2, 1]
const [dialer, listener] = [helloOf('dialer', versions), helloOf('listener', versions)]
const hellos = [encodeHello(dialer), encodeHello(listener)] as const
const vectors: LinkVectors = {
  version,
  frames: vectorFrames(version).map(({ about, frame }) => ({
    about,
    frame,
    hex: hex(encodeFrame(frame, version)),
  })),
  hellos: {
    dialer: { hello: dialer, hex: hex(hellos[0]) },
    listener: { hello: listener, hex: hex(hellos[1]) },
  },
  statements: {
    dialer: hex(linkStatement('dialer', ...hellos)),
    listener: hex(linkStatement('listener', ...hellos)),
  },
  proof: hex(encodeProof(proofBy(DIALER_KEYS, linkStatement('dialer', ...hellos)))),
}
const file = new URL(`data/link-v${version}-vectors.json`, import.meta.url)
writeFileSync(file, `${JSON.stringify(vectors, null, 2)}\n`)
