import { parseArgs } from 'node:util'
import { z } from 'zod'
import type { ActionName } from '@/lib/auth/permissions'
import { newPasswordSchema, ROLES } from '@/lib/data/dto'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { perform } from '@/lib/http/perform'
import { invalidInput } from '@/lib/http/problem'
import type { Runtime } from '@/lib/http/runtime'
import { createToken } from './tokens'
import { createUser } from './users'

const email = z.string().trim().toLowerCase().pipe(z.email())

const userSchema = z.object({
  email,
  name: z.string().trim().min(1),
  team: z.string().trim().min(1),
  role: z.enum(ROLES),
  password: newPasswordSchema,
})
const tokenSchema = z.object({ email, scope: z.enum(['read', 'write']), team: z.string().optional() })

interface Command {
  action: ActionName
  run(call: Call, options: unknown): Promise<object>
}

const COMMANDS: Record<string, Command> = {
  'user create': {
    action: 'user.create',
    run: (call, options) => createUser(call, parse(userSchema, options)),
  },
  'token create': {
    action: 'token.create',
    run: (call, options) => createToken(call, parse(tokenSchema, options)),
  },
}

/** One admin command, such as ["token", "create", "--email", …]: what is to be printed, or an AppError. */
export async function runAdminCommand(runtime: Runtime, words: readonly string[]): Promise<object> {
  const { values, positionals } = readArguments(words)
  const command = COMMANDS[positionals.join(' ')]
  if (!command) throw new AppError('invalid-input', `Say one of: ${Object.keys(COMMANDS).join(', ')}.`)
  return perform(runtime, {
    action: command.action,
    facts: { origin: '', secure: false, address: null, sessionId: null },
    authenticate: async () => ({ kind: 'system', name: 'admin command' }),
    run: (call) => command.run(call, values),
  })
}

const text = { type: 'string' } as const

function readArguments(words: readonly string[]) {
  try {
    return parseArgs({
      args: [...words],
      allowPositionals: true,
      options: { email: text, name: text, team: text, role: text, password: text, scope: text },
    })
  } catch (error) {
    throw new AppError('invalid-input', error instanceof Error ? error.message : String(error))
  }
}

function parse<S extends z.ZodType>(schema: S, options: unknown): z.output<S> {
  const result = schema.safeParse(options)
  if (!result.success) throw invalidInput(result.error)
  return result.data
}
