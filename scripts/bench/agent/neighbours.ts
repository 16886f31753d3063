/**
 * The measured agent's neighbours: real agents in a process of their own. Composition root; argument: JSON of `Wanted`.
 * Says "ready" once all run, and ends with its standard input.
 */
import { randomBytes } from 'node:crypto'
import { createClock, createHttpCollector, createPost, createWsTransport, silentLogger } from '@/agent'
import { createRandom, forkRandom } from '@/lib/method/random'
import { generateKeys } from '@/lib/protocol'
import { Member } from '../../fleet/member'
import { wantedSchema } from './wanted'

const wanted = wantedSchema.parse(JSON.parse(process.argv[2] ?? ''))
const { signal } = new AbortController()
const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const random = createRandom(randomBytes(16).toString('hex'))
const collector = createHttpCollector({ post: createPost(), clock }, { baseUrl: wanted.collector })
const transport = createWsTransport({ clock })
const members: Member[] = []
const addresses: string[] = []
for (let index = 0; index < wanted.count; index++) {
  const name = `${wanted.prefix}-${index}`
  const member = new Member(
    { transport, collector, clock, random: forkRandom(random, name), randomBytes, logger: silentLogger },
    {
      name,
      labels: {},
      code: wanted.code,
      keys: generateKeys(),
      host: '127.0.0.1',
      weights: null,
      pace: null,
      onLinkEvent: () => {},
    },
  )
  await member.enrol(signal)
  const address = await member.start()
  member.agent?.addNeighbour({ address: wanted.measured })
  if (wanted.linkedAmongThemselves) {
    for (const other of addresses) member.agent?.addNeighbour({ address: other })
    addresses.push(address)
  }
  members.push(member)
}
process.stdout.write('ready\n')
process.stdin.resume()
process.stdin.on('end', () => process.exit(0))
