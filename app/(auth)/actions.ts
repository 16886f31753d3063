'use server'

import { redirect } from 'next/navigation'
import { z } from 'zod'
import { countAttempt, firstRun, setPassword, signIn, signOut } from '@/lib/data'
import { firstRunSchema, newPasswordSchema, signInSchema } from '@/lib/data/dto'
import { action, getRuntime, setCookie } from '@/lib/http'
import { safeNext } from '@/lib/http/security-headers'

export const signInAction = action(
  'session.create',
  signInSchema.extend({ next: z.string().max(500).optional() }),
  async (call, { email, password, next }) => ({
    cookie: await signIn(call, { email, password }),
    attempt: { email, address: call.request.address },
    next: safeNext(next),
  }),
  {
    before: async (call, { email }) =>
      countAttempt(call, { throttle: await getRuntime().throttle() }, { email }),
    after: async ({ cookie, attempt, next }) => {
      await (await getRuntime().throttle()).clear(attempt)
      await setCookie(cookie)
      redirect(next)
    },
  },
)

export const signOutAction = action('session.end', z.object({}), (call) => signOut(call), {
  after: async (cookie) => {
    await setCookie(cookie)
    redirect('/sign-in')
  },
})

export const firstRunAction = action(
  'first-run.create',
  firstRunSchema,
  (call, input) => firstRun(call, input),
  {
    after: async (cookie) => {
      await setCookie(cookie)
      redirect('/overlays/new')
    },
  },
)

export const setPasswordAction = action(
  'password.set',
  z
    .object({ token: z.string().max(200), password: newPasswordSchema, passwordAgain: z.string() })
    .refine(({ password, passwordAgain }) => password === passwordAgain, {
      path: ['passwordAgain'],
      message: 'The two differ. Type the password again.',
    }),
  (call, { token, password }) => setPassword(call, { token, password }),
  {
    after: async (cookie) => {
      await setCookie(cookie)
      redirect('/overlays')
    },
  },
)
