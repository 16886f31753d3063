import type { Metadata } from 'next'
import { redirect } from 'next/navigation'
import { z } from 'zod'
import { PageHeading } from '@/components/ui'
import { isFirstRun } from '@/lib/data'
import { currentUser, page } from '@/lib/http'
import { safeNext } from '@/lib/http/security-headers'
import { SignInForm } from './sign-in-form'

export const metadata: Metadata = { title: 'Sign in' }

const searchSchema = z.object({ next: z.string().optional().catch(undefined) })

export default async function SignInPage({ searchParams }: { searchParams: Promise<unknown> }) {
  const { next } = searchSchema.parse(await searchParams)
  if (await currentUser()) redirect(safeNext(next))
  const fresh = await page('first-run.read', isFirstRun)
  if (fresh.ok && fresh.value) redirect('/first-run')
  return (
    <>
      <PageHeading title="Sign in" />
      <SignInForm next={next} />
    </>
  )
}
