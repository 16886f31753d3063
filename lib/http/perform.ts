import { AuditEntrySchema } from '@/entities'
import { ANYONE, actorOf, type Caller } from '@/lib/auth/caller'
import { type ActionName, permissionOf } from '@/lib/auth/permissions'
import type { EntityManager } from '@/lib/db'
import { AppError } from './app-error'
import { type AuditNote, assertAllowed, type Call, type CallRequest } from './call'
import { asAppError } from './problem'
import type { Runtime } from './runtime'

export interface Performance<T> {
  action: ActionName
  facts: CallRequest
  authenticate(em: EntityManager, now: Date): Promise<Caller>
  /** Others do all of it in the database: a manager of each call's own would cost more than much of the rest. */
  withoutManager?: boolean
  /** What must last though the rest is refused; while it waits for a connection the call must hold none. */
  before?(call: Call): Promise<void>
  run(call: Call): Promise<T>
}

/**
 * The middle of every wrapper: authenticate, authorise, run, audit. What is audited runs in one transaction
 * with its entry, so that neither is stored without the other; refusals and failures are entered afterwards,
 * unless strangers could fill the log with them.
 */
export async function perform<T>(
  runtime: Runtime,
  { action, facts, authenticate, withoutManager = false, before, run }: Performance<T>,
): Promise<T> {
  const em = await (withoutManager ? idleManager(runtime) : runtime.forkEm())
  const now = runtime.now()
  const { audit } = permissionOf(action)
  let caller: Caller = ANYONE
  let note: AuditNote = {}
  const callOn = (on: EntityManager): Call => ({
    em: on,
    caller,
    now,
    request: facts,
    checked: new Set(),
    note: (more) => {
      note = { ...note, ...more, data: more.data || note.data ? { ...note.data, ...more.data } : undefined }
    },
  })
  const checkedRun = async (on: EntityManager) => {
    const call = callOn(on)
    const value = await run(call)
    // A data function that forgot to authorise must not go unnoticed.
    if (!call.checked.has(action)) throw new Error(`"${action}" ran without being authorised in lib/data.`)
    return value
  }
  try {
    caller = await authenticate(em, now)
    assertAllowed(action, caller, null)
    await before?.(callOn(em))
    if (!audit) return await checkedRun(em)
    // Cleared, so that nothing read before the transaction passes for what is true inside it.
    return await em.transactional(
      async (tx) => {
        const value = await checkedRun(tx)
        if (!note.omit) await enter(tx, { action, caller, now, note, outcome: 'ok' })
        return value
      },
      { clear: true },
    )
  } catch (error) {
    const known = error instanceof AppError
    // While the database is away there is one for each call: a line each, and no more.
    if (asAppError(error).code === 'unavailable')
      runtime.log.warn({ action, reason: String(error) }, 'a call found no database')
    else if (!known) runtime.log.error({ action, err: error }, 'a call failed')
    if (audit && !isAnswerable(caller, note)) {
      const code = known ? error.code : 'internal'
      runtime.log.warn({ action, code, subject: note.subject }, 'a call by a stranger was refused')
    } else if (audit) {
      const outcome = known ? 'denied' : 'failed'
      const data = { ...note.data, ...(known ? { code: error.code } : {}) }
      await enter(em.fork(), { action, caller, now, note: { ...note, data }, outcome }).catch(
        (reason: unknown) => runtime.log.error({ action, err: reason }, 'an audit entry could not be stored'),
      )
    }
    throw error
  }
}

const idle = new WeakMap<Runtime, Promise<EntityManager>>()

/** One for all the calls that say that they leave theirs alone. */
function idleManager(runtime: Runtime): Promise<EntityManager> {
  const known = idle.get(runtime)
  if (known) return known
  const forked = runtime.forkEm()
  idle.set(runtime, forked)
  // The database may be there at the next call.
  forked.catch(() => idle.delete(runtime))
  return forked
}

/** A stranger, or an agent that is not let in, could repeat a refusal for ever. */
function isAnswerable({ kind }: Caller, { counted }: AuditNote): boolean {
  return kind === 'anyone' || kind === 'agent' ? counted === true : true
}

interface Entry {
  action: ActionName
  caller: Caller
  now: Date
  note: AuditNote
  outcome: 'ok' | 'denied' | 'failed'
}

async function enter(em: EntityManager, { action, caller, now, note, outcome }: Entry): Promise<void> {
  const actor = actorOf(caller)
  await em.insert(AuditEntrySchema, {
    at: now,
    // A call that was refused before it named a team is filed under the caller's first.
    teamId: note.teamId ?? ('teams' in caller ? caller.teams[0]?.teamId : null) ?? null,
    actorKind: actor.kind,
    actor: note.actor ?? actor.name,
    action,
    subject: note.subject ?? '',
    data: note.data ?? null,
    outcome,
  })
}
