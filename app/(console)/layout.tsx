import type { ReactNode } from 'react'
import { Shell } from '@/components/shell/shell'
import { currentUser } from '@/lib/http'
import { SignOutForm } from '../(auth)/sign-out/sign-out-form'

/** Shows who is here. What they may see is checked by each page. */
export default async function ConsoleLayout({ children }: { children: ReactNode }) {
  const user = await currentUser()
  return (
    <Shell user={user} signOut={<SignOutForm />}>
      {children}
    </Shell>
  )
}
