/** A new operator beside three nodes, with nothing but the texts of the Joining page and the file that the server serves. */
import { afterAll, beforeAll, expect, it } from 'vitest'
import { z } from 'zod'
import type { Reading } from '@/lib/data/dto'
import { AGENT_PORT, byHandCommands } from '@/lib/face/joining'
import { AgentFolder } from '@/tests/support/e2e/agent-folder'
import { Api } from '@/tests/support/e2e/api'
import { createOwner, createToken, type E2eServer, startServer } from '@/tests/support/e2e/server'
import { freePort } from '@/tests/support/free-port'
import { eventually, isLike, until } from '@/tests/support/until'

const SLUG = 'newcomers'
const NAMES = ['tar-01', 'gul-04', 'pin-02'] as const
/** Of a triangle of links that count 1: 3 (M. Fiedler, "Algebraic connectivity of graphs", 1973: n of a complete graph). */
const EXACT = 3
const TOLERANCE = 0.1

let server: E2eServer
let api: Api
let folder: AgentFolder

beforeAll(async () => {
  server = await startServer()
  folder = await AgentFolder.make()
  await createOwner(server)
  api = new Api(server.url, { token: await createToken(server, 'write') })
  await api.createOverlay({
    name: 'Newcomers',
    slug: SLUG,
    pace: 'drill',
    weights: 'unit',
    disclosure: 'named',
  })
})
afterAll(async () => {
  await folder?.stop()
  await server?.stop()
})

it('forms an overlay of three from the texts of the Joining page, and reads it', async () => {
  const { code } = await api.createJoiningCode(SLUG, { uses: NAMES.length })
  const served: unknown = await (await fetch(`${server.url}/agent/thinspan-agent.json`)).json()
  const file = z.object({ version: z.string(), sha256: z.string() }).parse(served)
  const nodeVersion = process.versions.node
  const commands = byHandCommands({ origin: server.url, code, file, nodeVersion })
  const textOf = (id: string): string => {
    const command = commands.find((one) => one.id === id)
    if (!command) throw new Error(`The page has no command "${id}".`)
    return command.text
  }
  expect(await folder.type(textOf('download'))).toContain('thinspan-agent.mjs: OK')
  const ports = [await freePort(), await freePort(), await freePort()]
  for (const [index, name] of NAMES.entries()) {
    const typed = (text: string): string => filledIn(text, name, ports, index)
    await folder.type(typed(textOf('enrol')))
    folder.run(typed(textOf('run')))
  }
  const isRead = ({ data, lambda2 }: Reading) =>
    data === 'fresh' && Math.abs((lambda2 ?? 0) / EXACT - 1) < TOLERANCE
  const coverage = { joined: 3, heard: 3, unheard: 0, linksKnown: 3, linksMeasured: 3 }
  await readingOf((one) => isRead(one) && isLike(one.coverage, coverage))
  await eventually(async () => {
    const { items } = await api.nodes(SLUG)
    expect(items.map(({ name, state }) => `${name} ${state}`).sort()).toEqual(
      [...NAMES].sort().map((name) => `${name} heard`),
    )
    expect(new Set(items.map(({ version }) => version))).toEqual(new Set([file.version]))
  })
})

it('comes down by one node that leaves as the page says, and says so', async () => {
  const leave = byHandCommands({ origin: server.url, code: null, file: null, nodeVersion: '' }).find(
    ({ id }) => id === 'leave',
  )
  await folder.type((leave?.text ?? '').replaceAll('NAME', NAMES[2]))
  await readingOf(({ coverage }) => isLike(coverage, { joined: 2, unheard: 0 }))
  expect(server.failures()).toEqual([])
})

/** What only the reader knows: the name, this machine for every host, a port each, and all earlier nodes as neighbours. */
function filledIn(text: string, name: string, ports: readonly number[], index: number): string {
  const peers = ports.slice(0, index).map((port) => `--neighbour ws://127.0.0.1:${port}`)
  return text
    .replace(/--neighbour ws:\/\/PEER:\d+/, peers.join(' '))
    .replace(`0.0.0.0:${AGENT_PORT}`, `127.0.0.1:${ports[index]}`)
    .replaceAll(`HOST:${AGENT_PORT}`, `127.0.0.1:${ports[index]}`)
    .replaceAll('NAME', name)
}

async function readingOf(isWanted: (reading: Reading) => boolean): Promise<void> {
  let reading: Reading | null = null
  const isThere = async () => {
    reading = await api.reading(SLUG)
    return isWanted(reading)
  }
  await until(isThere, { explain: () => `${isWanted}\n${JSON.stringify(reading)}\n${folder.tail()}` })
}
