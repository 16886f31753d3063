import { createPrivateKey } from 'node:crypto'
import type { Frame } from '@/lib/method/frame'
import type { Orders } from '@/lib/method/orders'
import { type Hello, type KeyPair, rawPublicKey, signBytes } from '@/lib/protocol'

/** What a file of vectors holds: values as JSON, and their bytes as hexadecimal. */
export interface LinkVectors {
  version: number
  frames: { about: string; frame: Frame; hex: string }[]
  hellos: { dialer: { hello: Hello; hex: string }; listener: { hello: Hello; hex: string } }
  /** What both ends sign of this exchange, and the dialer's proof with the key whose seed is 32 bytes of 7. */
  statements: { dialer: string; listener: string }
  proof: string
}

/** Ed25519 in PKCS #8 (RFC 8410 §7): this prefix and the seed. A key everybody knows, for vectors alone. */
const PKCS8_PREFIX = Buffer.from('302e020100300506032b657004220420', 'hex')

export function knownKeys(fill: number): KeyPair {
  const der = Buffer.concat([PKCS8_PREFIX, Buffer.alloc(32, fill)])
  const privateKey = createPrivateKey({ key: der, format: 'der', type: 'pkcs8' })
  const { x } = privateKey.export({ format: 'jwk' })
  return { privateKey, publicKey: x ?? rawPublicKey(privateKey) }
}

export const DIALER_KEYS = knownKeys(7)
export const LISTENER_KEYS = knownKeys(8)

export const helloOf = (role: 'dialer' | 'listener', versions: number[]): Hello => ({
  versions,
  key: (role === 'dialer' ? DIALER_KEYS : LISTENER_KEYS).publicKey,
  pass: `pass-of-the-${role}`,
  incarnation: `incarnation-${role}`,
  nonce: Buffer.alloc(32, role === 'dialer' ? 1 : 2).toString('base64url'),
})

export const proofBy = (keys: KeyPair, statement: Uint8Array): Uint8Array =>
  signBytes(keys.privateKey, statement)

const colony = (slot: number, sent: number) => ({
  colony: slot,
  seeding: 9_000 + slot,
  refused: slot === 3,
  sentX: sent,
  sentY: sent + 1,
  receivedX: Math.max(0, sent - 2),
  receivedY: sent + 3,
  meanOccupancy: (slot - 2) * 12.25,
})

export const VECTOR_ORDERS: Orders = {
  sequence: 77,
  pace: { tickMs: 200, intervalMs: 2_000 },
  linkTimePerSecond: 0.75,
  colonies: [
    {
      colony: 0,
      seeding: 9_000,
      salt: 123_456,
      placing: true,
      placeX: 200,
      placeY: 201,
      encounterRate: 0.0123,
      birthRateX: 0.05,
      birthRateY: -0.01,
      refused: ['eel-09'],
    },
  ],
  sweep: {
    id: 76,
    terms: [{ colony: 0, seeding: 9_000, coefficient: 1 }],
    mean: 0.5,
    norm: 0.25,
    thresholds: [-1, 0, 1],
    lambda2: 0.0625,
    nodes: 36,
  },
  disclosure: 'flagged',
  shareLimit: 0.1,
}

const plain: Frame = {
  number: 1,
  heardNumber: 0,
  weight: 1,
  closing: false,
  consents: false,
  ordersSequence: 0,
  orders: null,
  colonies: [],
}

const FRAMES_OF_VERSION_1: readonly { about: string; frame: Frame }[] = [
  { about: 'the first frame of a link', frame: plain },
  {
    about: 'a link that is held to be down, closing',
    frame: { ...plain, number: 300, heardNumber: 299, weight: 0, closing: true, consents: true },
  },
  {
    about: 'five colonies, one refused',
    frame: {
      ...plain,
      number: 7_200_000,
      heardNumber: 7_199_800,
      weight: 0.85,
      consents: true,
      ordersSequence: 77,
      colonies: [0, 1, 2, 3, 4].map((slot) => colony(slot, 12_345 * slot)),
    },
  },
  {
    about: 'the largest counts',
    frame: {
      ...plain,
      number: Number.MAX_SAFE_INTEGER,
      heardNumber: Number.MAX_SAFE_INTEGER,
      colonies: [{ ...colony(65_535, Number.MAX_SAFE_INTEGER - 3), seeding: Number.MAX_SAFE_INTEGER }],
    },
  },
  {
    about: 'orders passed on',
    frame: {
      ...plain,
      number: 5_000,
      heardNumber: 4_800,
      ordersSequence: 77,
      orders: { orders: VECTOR_ORDERS, ageMs: 1_234 },
      colonies: [colony(0, 40)],
    },
  },
]

const text = JSON.stringify(VECTOR_ORDERS)
const filled = (length: number, fill: number) => Buffer.alloc(length, fill).toString('base64url')
const later = { distance: 3, heardFrames: 0, statement: null } as const

const FRAMES_OF_VERSION_2: readonly { about: string; frame: Frame }[] = [
  ...FRAMES_OF_VERSION_1.map(({ about, frame }) => ({ about, frame: { ...frame, ...later, orders: null } })),
  {
    about: 'signed orders passed on by an agent one link from the collector',
    frame: {
      ...plain,
      ...later,
      number: 5_000,
      heardNumber: 4_800,
      heardFrames: 24,
      distance: 1,
      ordersSequence: 77,
      orders: {
        orders: VECTOR_ORDERS,
        ageMs: 1_234,
        proof: { text, key: filled(32, 3), signature: filled(64, 4) },
      },
      colonies: [colony(0, 40)],
    },
  },
  {
    about: 'a statement with its receipt',
    frame: {
      ...plain,
      ...later,
      number: 5_200,
      distance: 0,
      statement: {
        statement: {
          agentId: 'tar-01',
          incarnation: 'incarnation-tar-01',
          reportNumber: 9,
          colonies: [0, 1].map((slot) => ({
            colony: slot,
            seeding: 9_000 + slot,
            mean: slot === 0 ? -12_544 : 12_544,
            births: 1_000 + slot,
            culls: 3,
            walkerTime: 7_654_321,
            linkTime: 65_432,
          })),
        },
        key: filled(32, 3),
        receipt: filled(64, 5),
      },
    },
  },
  {
    about: 'masked rounds that the sender is ready for, and those it has heard of',
    frame: {
      ...plain,
      ...later,
      number: 5_400,
      rounds: { ready: [1_201, 1_202, 1_330], heard: [Number.MAX_SAFE_INTEGER] },
    },
  },
]

/** Frames that use every field a version has. */
export const vectorFrames = (version: number) => (version === 1 ? FRAMES_OF_VERSION_1 : FRAMES_OF_VERSION_2)
