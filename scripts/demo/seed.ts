import {
  AgentSchema,
  JoiningCodeSchema,
  MembershipSchema,
  OverlaySchema,
  TeamSchema,
  type User,
  UserSchema,
  WarningRuleSchema,
} from '@/entities'
import { userCaller } from '@/lib/auth/authenticate'
import type { Caller } from '@/lib/auth/caller'
import { hashPassword, verifyPassword } from '@/lib/auth/password'
import type { ActionName } from '@/lib/auth/permissions'
import { hashJoiningCode } from '@/lib/auth/secrets'
import { createJoiningCode, createOverlay } from '@/lib/data'
import { newOverlaySchema } from '@/lib/data/dto'
import { stateOf } from '@/lib/data/joining-codes'
import { slugFrom } from '@/lib/data/teams'
import { createUser } from '@/lib/data/users'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { perform } from '@/lib/http/perform'
import type { Runtime } from '@/lib/http/runtime'
import { PEOPLE, type Person, TEAM } from './people'

const OVERLAY = {
  name: 'Harbourline',
  pace: 'steady',
  disclosure: 'named',
  weights: 'delivered',
  contact: 'Harbourline duty desk, desk@harbourline.example, channel 12',
  runbookUrl: 'https://runbook.harbourline.example/links-across-the-sound',
} as const
/** The second for a server whose people have an overlay called "harbourline" themselves. */
const SLUGS = ['harbourline', 'harbourline-demo']
const CODE_HOURS = 24

export interface SeedInit {
  passwords: Readonly<Record<string, string>>
  /** Passwords of this start, which nobody can have changed yet: those in the database are older. */
  passwordsAreNew: boolean
  joiningCode: string | null
  /** Public key by node name. */
  publicKeys: ReadonlyMap<string, string>
}

export interface Seeded {
  overlayId: string
  slug: string
  joiningCode: string
  /** `password` is null where the person has chosen another. */
  signIns: (Person & { password: string | null })[]
  /** Agents of an earlier data folder whose keys are gone, taken out so that their names are free. */
  removedAgents: number
}

/** People, team, overlay and joining code of the demo: what is missing is made, as people make it. Safe to repeat. */
export async function seedDemo(runtime: Runtime, init: SeedInit): Promise<Seeded> {
  const signIns: Seeded['signIns'] = []
  for (const person of PEOPLE)
    signIns.push({ ...person, password: await ensurePerson(runtime, person, init) })
  const overlay = await ensureOverlay(runtime)
  return {
    overlayId: overlay.id,
    slug: overlay.slug,
    removedAgents: await removeStrangers(runtime, overlay.id, init.publicKeys),
    joiningCode: await ensureCode(runtime, overlay, init),
    signIns,
  }
}

async function ensurePerson(runtime: Runtime, person: Person, init: SeedInit): Promise<string | null> {
  const password = init.passwords[person.email]
  if (password === undefined) throw new Error(`There is no password for ${person.email}.`)
  const em = await runtime.forkEm()
  const known = await em.findOne(UserSchema, { email: person.email })
  if (!known) {
    await as(runtime, 'user.create', { kind: 'system', name: 'demo' }, (call) =>
      createUser(call, { ...person, team: TEAM, password }),
    )
    return password
  }
  if (await verifyPassword(known.passwordHash, password)) return password
  if (!init.passwordsAreNew) return null
  known.passwordHash = await hashPassword(password)
  await em.flush()
  return password
}

async function ensureOverlay(runtime: Runtime): Promise<{ id: string; slug: string }> {
  const em = await runtime.forkEm()
  const team = { slug: slugFrom(TEAM) }
  const known = await em.findOne(OverlaySchema, { demo: true, team })
  if (known) return known
  const taken = await em.find(OverlaySchema, { slug: { $in: SLUGS } })
  const slug = SLUGS.find((one) => !taken.some((overlay) => overlay.slug === one))
  if (!slug)
    throw new Error(`Overlays called ${SLUGS.join(' and ')} are there already. Start with --no-demo.`)
  const input = newOverlaySchema.parse({ ...OVERLAY, slug, team: team.slug })
  await as(runtime, 'overlay.create', await anOwner(em), async (call) => {
    await createOverlay(call, input)
    const { id } = await call.em.findOneOrFail(OverlaySchema, { slug })
    await call.em.nativeUpdate(OverlaySchema, { id }, { demo: true })
    // Its story is told in minutes.
    await call.em.nativeUpdate(
      WarningRuleSchema,
      { overlay: id },
      { onDelaySeconds: 30, offDelaySeconds: 60 },
    )
  })
  return em.findOneOrFail(OverlaySchema, { slug })
}

async function removeStrangers(
  runtime: Runtime,
  overlayId: string,
  publicKeys: ReadonlyMap<string, string>,
): Promise<number> {
  const em = await runtime.forkEm()
  const agents = await em.find(AgentSchema, { overlay: overlayId, name: { $in: [...publicKeys.keys()] } })
  const strangers = agents.filter(({ name, publicKey }) => publicKeys.get(name) !== publicKey)
  if (strangers.length > 0) await em.nativeDelete(AgentSchema, { id: { $in: strangers.map(({ id }) => id) } })
  return strangers.length
}

/** The code kept, while it opens for all that have not joined yet; an agent that has joined needs no use of it. */
async function ensureCode(
  runtime: Runtime,
  overlay: { id: string; slug: string },
  { joiningCode, publicKeys }: SeedInit,
): Promise<string> {
  const em = await runtime.forkEm()
  const joined = await em.count(AgentSchema, { overlay: overlay.id, name: { $in: [...publicKeys.keys()] } })
  const missing = publicKeys.size - joined
  if (joiningCode !== null) {
    const hash = hashJoiningCode(joiningCode)
    const code = await em.findOne(JoiningCodeSchema, { hash, overlay: overlay.id })
    if (code && missing === 0) return joiningCode
    if (code && stateOf(code, runtime.now()) === 'open' && code.uses - code.used >= missing)
      return joiningCode
  }
  const uses = Math.max(1, missing)
  const created = await as(runtime, 'joining-code.create', await anOwner(em), (call) =>
    createJoiningCode(call, overlay.slug, { uses, expiresInHours: CODE_HOURS }),
  )
  return created.code
}

/** Whoever owns the team now: people may have been changed since the first start, but one owner is always left. */
async function anOwner(em: EntityManager): Promise<Caller> {
  const { id } = await em.findOneOrFail(TeamSchema, { slug: slugFrom(TEAM) })
  const owner = await em.findOneOrFail(
    MembershipSchema,
    { team: id, role: 'owner' },
    { orderBy: { createdAt: 'asc', id: 'asc' } },
  )
  const user: Pick<User, 'id'> = owner.user
  return userCaller(em, user.id)
}

function as<T>(
  runtime: Runtime,
  action: ActionName,
  caller: Caller,
  run: (call: Call) => Promise<T>,
): Promise<T> {
  return perform(runtime, {
    action,
    facts: { origin: '', secure: false, address: null, sessionId: null },
    authenticate: async () => caller,
    run,
  })
}
