import type { Metadata } from 'next'
import { z } from 'zod'
import { FailedState, LinkButton, PageHeading } from '@/components/ui'
import { readPasswordLink } from '@/lib/data'
import { page } from '@/lib/http'
import { SetPasswordForm } from './set-password-form'

export const metadata: Metadata = { title: 'Set a password', referrer: 'no-referrer' }

const paramsSchema = z.object({ token: z.string().max(200) })

export default async function SetPasswordPage({ params }: { params: Promise<unknown> }) {
  const { token } = paramsSchema.parse(await params)
  const link = await page('password.read-link', (call) => readPasswordLink(call, token))
  if (!link.ok)
    return (
      <>
        <PageHeading title="Set a password" />
        <FailedState
          title={link.problem.title}
          actions={<LinkButton href="/sign-in">Go to sign in</LinkButton>}
        >
          {link.problem.detail}
        </FailedState>
      </>
    )
  return (
    <>
      <PageHeading title="Set a password">
        For {link.value.name}, who signs in as {link.value.email}. The link works once.
      </PageHeading>
      <SetPasswordForm token={token} email={link.value.email} />
    </>
  )
}
